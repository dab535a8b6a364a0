/** Acceptance lines the checker proposes, and the inductance band the tank allows. */
import { copperResistivity } from '../materials/material-of.ts';
import { metalArea } from '../coil/section.ts';
import type { CopperPath } from '../shop/path.ts';
import type { CheckContext } from './context.ts';
import type { AcceptanceLine, AcceptanceKind, Unit } from './types.ts';

/** A shop holds a bare inductance to about this (common practice), and measures it to about that. */
export const shopInductanceBand = 0.05;
export const measurableBand = 0.01;

/**
 * Relative change of the coil's bare inductance that keeps the fitted (or advised) row inside the supply's range cold
 * and hot, with half of the room left to the bank's tolerance. null where the range is open on both sides or the row is
 * outside already.
 */
export function allowedInductanceBand(context: CheckContext): { down: number; up: number } | null {
  const { models, bare } = context;
  const row = context.ladder.find((one) => one.fitted) ?? context.ladder.find((one) => one.advised);
  const solved = context.fittedRow;
  if (!models || !row || !bare || !solved) return null;
  const { frequencyMin, frequencyMax } = models.assumed;
  if (frequencyMin === null && frequencyMax === null) return null;
  const low = Math.min(row.cold.frequency.value, row.hot.frequency.value);
  const high = Math.max(row.cold.frequency.value, row.hot.frequency.value);
  if ((frequencyMin !== null && low < frequencyMin) || (frequencyMax !== null && high > frequencyMax))
    return null;
  const hot = solved.points.hot;
  const ratio2 =
    solved.circuit.transformer && solved.circuit.bankSide === 'primary' ? solved.circuit.ratio ** 2 : 1;
  // Room of the tank's inductance, as a share of the loaded coil's own.
  const shareOfTank = (ratio2 * hot.point.inductance) / hot.branch.inductance;
  const up = frequencyMin === null ? 1 : ((low / frequencyMin) ** 2 - 1) / shareOfTank;
  const down = frequencyMax === null ? 1 : (1 - (high / frequencyMax) ** 2) / shareOfTank;
  const factor = bareOverLoaded(context);
  return { up: up * factor, down: down * factor };
}

/** What a change of the opening does to the bare inductance over what it does to the loaded one. */
function bareOverLoaded(context: CheckContext): number {
  const effectOf = (contributors: { name: string; effect: number }[] | undefined) =>
    contributors?.find((one) => one.name === 'coil opening')?.effect;
  const bare = effectOf(context.bare?.inductance.contributors);
  const loaded = effectOf(context.hot?.inductance.contributors);
  return bare && loaded && loaded !== 0 ? Math.min(1, Math.abs(bare / loaded)) : 0.6;
}

function line(
  kind: AcceptanceKind,
  label: string,
  unit: Unit,
  change: Partial<AcceptanceLine>,
): AcceptanceLine {
  return {
    id: kind,
    kind,
    label,
    basis: 'computed',
    nominal: null,
    low: null,
    high: null,
    unit,
    testFrequency: null,
    temperatureC: 20,
    measuringPlane: '',
    leadState: '',
    holdTime: null,
    differentialPressure: null,
    note: '',
    ...change,
  };
}

export function proposedAcceptance(context: CheckContext): AcceptanceLine[] {
  const lines: AcceptanceLine[] = [];
  const { bareAtTest, requirement, path, geometry, water, mechanics } = context;
  if (bareAtTest) {
    const allowed = allowedInductanceBand(context);
    const clamp = (share: number) => Math.min(shopInductanceBand, Math.max(2 * measurableBand, share / 2));
    const nominal = bareAtTest.inductance.value;
    const [down, up] = allowed
      ? [clamp(allowed.down), clamp(allowed.up)]
      : [shopInductanceBand, shopInductanceBand];
    lines.push(
      line('inductance', 'Inductance of the coil alone', 'H', {
        nominal,
        low: nominal * (1 - down),
        high: nominal * (1 + up),
        testFrequency: bareAtTest.frequency,
        measuringPlane: 'contact faces',
        leadState: 'leads as fitted, no part in the coil',
        note: allowed
          ? 'Band from the frequency range of the supply.'
          : 'Band of shop practice: the frequency range gives none.',
      }),
    );
  }
  const tolerance = requirement.coil.diameterTolerance;
  if (geometry.resolved && geometry.rings && tolerance !== null) {
    const nominal = geometry.resolved.insideDiameter;
    lines.push(
      line('inside-diameter', 'Clear opening', 'm', {
        nominal,
        low: nominal - tolerance,
        high: nominal + tolerance,
      }),
    );
  }
  if (mechanics) {
    lines.push(
      line('hydrostatic', 'Hydrostatic test', 'Pa', {
        nominal: mechanics.testPressure,
        low: mechanics.testPressure,
        holdTime: 900,
      }),
    );
  }
  if (water) {
    const flow = water.flow.value;
    lines.push(
      line('flow', 'Water flow of the whole coil', 'm3/s', {
        nominal: flow,
        low: Math.min(water.flow.low, 0.85 * flow),
        differentialPressure: water.pressureDrop.value,
        note: 'Measured at the connection, all circuits open.',
      }),
    );
  }
  if (path && geometry.section) {
    const dc = dcResistance(context, path);
    lines.push(
      line('dc-resistance', 'DC resistance, four wires', 'ohm', {
        nominal: dc,
        low: 0.85 * dc,
        high: 1.1 * dc,
      }),
    );
  }
  return lines;
}

function dcResistance(context: CheckContext, path: CopperPath): number {
  const { coil } = context.requirement;
  const length = path.windingLength + 2 * (coil.leads?.length ?? 0);
  const area = context.geometry.section ? metalArea(context.geometry.section) : Number.NaN;
  return (copperResistivity(coil.copperGrade, 20) * length) / area;
}
