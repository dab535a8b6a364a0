/** From a coil that runs on the machine to the machine's unknowns. */
import { calibrate, type CalibrationPoint, type CalibrationResult } from '../tank/calibrate.ts';
import { resolveGeometry } from './resolve.ts';
import { Solver } from './solver.ts';
import type { Requirement, SolverSetting } from './types.ts';

export interface SeenSetting extends CalibrationPoint {
  /** What was in the coil when the frequency was read. */
  loading: 'empty' | 'cold' | 'hot';
}

export interface ExistingCoilFit {
  result: CalibrationResult;
  /** Computed inductance of the coil at its contact faces in the state seen, H. */
  coilInductance: number | null;
}

/**
 * Fits fixed inductance and stray capacitance of the machine from settings and frequencies seen with a known coil.
 *
 * All settings must have been seen in one state (empty, cold or hot). With one setting only the fixed inductance is
 * fitted.
 *
 * @param requirement machine, coil and part as they were; the coil's turns must be known
 * @param frequencyBand relative half band of the reading, e.g. 0.005
 */
export function fitExistingCoil(
  requirement: Requirement,
  seen: readonly SeenSetting[],
  frequencyBand: number,
  setting: SolverSetting = 'default',
): ExistingCoilFit {
  const first = seen[0];
  const refuse = (message: string): ExistingCoilFit => ({
    result: { ok: false, message },
    coilInductance: null,
  });
  if (!first) return refuse('Give at least one bank setting with the frequency seen.');
  if (seen.some((one) => one.loading !== first.loading))
    return refuse('All frequencies must be seen in one state: empty, cold or hot.');
  const geometry = resolveGeometry(requirement);
  const part = first.loading === 'empty' ? null : geometry.part;
  if (first.loading !== 'empty' && !part)
    return refuse('The coil with its part cannot be computed: use frequencies seen with the coil empty.');
  const solver = new Solver(requirement, { setting });
  const frequency = Math.sqrt(
    Math.min(...seen.map((s) => s.frequency)) * Math.max(...seen.map((s) => s.frequency)),
  );
  const answer =
    Number.isFinite(frequency) && frequency > 0
      ? solver.ask({
          coil: geometry.coil,
          part,
          frequency,
          state: first.loading === 'hot' ? 'hot' : 'cold',
          current: 500,
          includeLeads: true,
          setting,
        })
      : null;
  if (!answer) return refuse(solver.refusals[0]?.message ?? 'The coil cannot be computed.');
  const { transformer } = requirement.machine;
  const primary = transformer?.bankSide === 'primary';
  const omega = 2 * Math.PI * frequency;
  const result = calibrate({
    points: [...seen],
    coilInductance: answer.inductance,
    coilBand: answer.inductanceError,
    capacitanceBand: bankTolerance(requirement),
    frequencyBand,
    ratio: transformer && primary ? (transformer.ratios[transformer.fittedTap] ?? 1) : 1,
    leakage: primary ? (transformer?.leakageInductance ?? 0) : 0,
    q: (omega * answer.inductance) / answer.resistance,
  });
  return { result, coilInductance: answer.inductance };
}

function bankTolerance(requirement: Requirement): number {
  const { bank } = requirement.machine;
  const tolerances =
    bank.kind === 'groups' ? bank.groups.map((g) => g.tolerance) : bank.totals.map((t) => t.tolerance);
  return Math.max(0, ...tolerances);
}
