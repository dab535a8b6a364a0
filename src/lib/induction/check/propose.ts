/** Proposals: what was left open (turns, tube, bank setting) is searched, and a handful of sound choices returned. */
import { checkRequirement } from './check-requirement.ts';
import { rowFixes } from './findings/frequency.ts';
import { rank, variantsOf, type Variant } from './propose-variants.ts';
import { resolveGeometry } from './resolve.ts';
import { CheckStoppedError } from './solver.ts';
import type { CheckResult, Finding, LadderRow, Requirement, TubeSection } from './types.ts';

export interface ProposeOptions {
  /** Most candidates, up to 5. */
  limit?: number;
  onProgress?: (share: number) => void;
  shouldStop?: () => boolean;
  /** What may be changed beside open turns and the bank setting. Default: only what is open. */
  open?: ('turns' | 'tube')[];
}

export interface Candidate {
  id: string;
  /** The requirement with the choice filled in. */
  requirement: Requirement;
  turns: number;
  tube: TubeSection;
  /** Bank setting and tap. */
  setting: string;
  check: CheckResult;
  /** Why it is among the candidates. */
  reason: string;
}

export interface Proposals {
  candidates: Candidate[];
  /** When there is none: the blockers met most often, with what would mend them. */
  obstacles: Finding[];
}

/** Full checks that one search may spend, a preview without bands each; saturating steel costs several times more. */
const mostChecks = { plain: 10, magnetic: 5 };

/**
 * Searches the open choices with the preview solution.
 *
 * Every combination is ranked by the closed formulas over the whole ladder; the promising ones are checked, each on the
 * bank setting that suits it; those without a blocker are spread along power, efficiency, frequency margin, voltage and
 * water.
 *
 * @throws CheckStoppedError when `shouldStop` says so
 */
export function proposeCandidates(requirement: Requirement, options: ProposeOptions = {}): Proposals {
  const limit = Math.min(5, Math.max(1, options.limit ?? 5));
  const all = variantsOf(requirement, options);
  const variants = rank(all);
  const magnetic = resolveGeometry(requirement).material?.magnetisation != null;
  const wanted = variants.slice(0, magnetic ? mostChecks.magnetic : mostChecks.plain);
  const sound: Candidate[] = [];
  const blockers: Finding[] = [];
  wanted.forEach((variant, index) => {
    if (options.shouldStop?.()) throw new CheckStoppedError();
    options.onProgress?.(index / wanted.length);
    const candidate = checked(variant, options);
    const blocking = candidate.check.findings.filter((one) => one.severity === 'blocker' && !aboutPaper(one));
    if (blocking.length === 0) sound.push(candidate);
    else blockers.push(...blocking);
  });
  options.onProgress?.(1);
  if (sound.length > 0) return { candidates: spread(sound, limit), obstacles: [] };
  return {
    candidates: [],
    obstacles:
      variants.length > 0
        ? mostFrequent(blockers)
        : standingInTheWay(all[Math.floor(all.length / 2)]?.requirement ?? requirement),
  };
}

/** What no choice of turns or tube can mend. */
const aboutPaper = (finding: Finding) =>
  finding.code === 'handing-missing' || finding.code === 'connection-missing';

function standingInTheWay(requirement: Requirement): Finding[] {
  return checkRequirement(requirement, { setting: 'preview', bands: false }).findings.filter(
    (one) => one.severity === 'blocker' && one.code !== 'turns-open',
  );
}

function mostFrequent(findings: readonly Finding[]): Finding[] {
  const count = new Map<string, { times: number; finding: Finding }>();
  for (const one of findings) {
    const known = count.get(one.code);
    count.set(one.code, { times: (known?.times ?? 0) + 1, finding: known?.finding ?? one });
  }
  return [...count.values()].sort((a, b) => b.times - a.times).map((entry) => entry.finding);
}

function applyFixes(requirement: Requirement, check: CheckResult, row: LadderRow): Requirement {
  const context = { requirement } as Parameters<typeof rowFixes>[0];
  const next = structuredClone(requirement);
  for (const fix of rowFixes(context, row)) {
    const match = /^machine\.bank\.(groups|totals)\.(\d+)\.fitted$/.exec(fix.field);
    if (match && next.machine.bank.kind === 'groups' && typeof fix.value === 'number') {
      const group = next.machine.bank.groups[Number(match[2])];
      if (group) group.fitted = fix.value;
    } else if (match && next.machine.bank.kind === 'totals' && typeof fix.value === 'boolean') {
      const total = next.machine.bank.totals[Number(match[2])];
      if (total) total.fitted = fix.value;
    } else if (
      fix.field === 'machine.transformer.fittedTap' &&
      next.machine.transformer &&
      typeof fix.value === 'number'
    ) {
      next.machine.transformer.fittedTap = fix.value;
    }
  }
  return next;
}

/** The variant on its cheap setting, moved once to the advised row when that is better. */
function checked(variant: Variant, options: ProposeOptions): Candidate {
  const settings = {
    setting: 'preview',
    bands: false,
    ...(options.shouldStop ? { shouldStop: options.shouldStop } : {}),
  } as const;
  let { requirement } = variant;
  let check = checkRequirement(requirement, settings);
  const advised = check.ladder.find((row) => row.advised);
  const fitted = check.ladder.find((row) => row.fitted);
  const worse =
    advised && (!fitted || !fitted.cold.inBand || !fitted.hot.inBand || (advised.fits && !fitted.fits));
  if (advised && worse && advised !== fitted) {
    requirement = applyFixes(requirement, check, advised);
    check = checkRequirement(requirement, settings);
  }
  const row = check.ladder.find((one) => one.fitted);
  return {
    id: `${variant.turns}-${Math.round(sizeOf(variant.tube) * 1e5)}-${row?.id ?? 'none'}`,
    requirement,
    turns: variant.turns,
    tube: variant.tube,
    setting: row?.label ?? '',
    check,
    reason: '',
  };
}

const sizeOf = (tube: TubeSection) =>
  tube.kind === 'round' ? tube.outsideDiameter : tube.kind === 'square' ? tube.side : tube.axialWidth;

/** Aims along which candidates are spread, best first. */
const aims: readonly { reason: string; of: (candidate: Candidate) => number }[] = [
  {
    reason: 'Most power into the part.',
    of: (c) => Math.min(...rowOf(c).map((state) => state.powerIntoPart)),
  },
  {
    reason: 'Highest coil efficiency.',
    of: (c) => Math.min(c.check.hot?.efficiency.value ?? 0, c.check.cold?.efficiency.value ?? 0),
  },
  { reason: 'Frequency furthest inside the supply’s range.', of: margin },
  { reason: 'Lowest coil voltage.', of: (c) => -(c.check.tank?.coilVoltage.value ?? Infinity) },
  { reason: 'Least heat in the water.', of: (c) => -(c.check.water?.duty.value ?? Infinity) },
];

function rowOf(candidate: Candidate) {
  const row = candidate.check.ladder.find((one) => one.fitted);
  return row ? [row.cold, row.hot] : [];
}

function margin(candidate: Candidate): number {
  const { frequencyMin, frequencyMax } = candidate.requirement.machine.supply;
  return Math.min(
    ...rowOf(candidate).flatMap((state) => [
      frequencyMin === null ? Infinity : Math.log(state.frequency.value / frequencyMin),
      frequencyMax === null ? Infinity : Math.log(frequencyMax / state.frequency.value),
    ]),
  );
}

function spread(sound: readonly Candidate[], limit: number): Candidate[] {
  const chosen = new Map<string, Candidate>();
  for (const aim of aims) {
    const best = [...sound].sort((a, b) => aim.of(b) - aim.of(a))[0];
    if (!best) continue;
    const known = chosen.get(best.id);
    if (known) chosen.set(best.id, { ...known, reason: `${known.reason} ${aim.reason}` });
    else if (chosen.size < limit) chosen.set(best.id, { ...best, reason: aim.reason });
  }
  const rest = [...sound].sort((a, b) => (aims[0]?.of(b) ?? 0) - (aims[0]?.of(a) ?? 0));
  for (const candidate of rest) {
    if (chosen.size >= limit) break;
    if (!chosen.has(candidate.id))
      chosen.set(candidate.id, { ...candidate, reason: 'Next in power into the part.' });
  }
  return [...chosen.values()];
}
