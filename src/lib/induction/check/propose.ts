/** Proposals: what was left open (turns, tube, bank setting) is searched, and a handful of sound choices returned. */
import { cheapImpedance } from '../field/cheap.ts';
import { InductionInputError } from '../input-error.ts';
import { arrangements } from '../tank/bank.ts';
import { stockTubes } from '../shop/tube-stock.ts';
import { assumeMachine } from './assume.ts';
import { checkRequirement } from './check-requirement.ts';
import { coilModel, pointOf } from './coil-model.ts';
import { rowFixes } from './findings/frequency.ts';
import { circuitOf, inRange, rowSettings, type RowSetting } from './ladder.ts';
import { operatingPoint } from './operating-point.ts';
import { explicitWinding, resolveGeometry } from './resolve.ts';
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

interface Variant {
  requirement: Requirement;
  turns: number;
  tube: TubeSection;
  /** Power into the part by the cheap formulas on the best row, W; ranks only. */
  score: number;
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

function variantsOf(requirement: Requirement, options: ProposeOptions): Variant[] {
  const { winding, tube } = requirement.coil;
  const turnsOpen = 'turns' in winding && (winding.turns === null || options.open?.includes('turns'));
  const tubes = options.open?.includes('tube') && tube.kind === 'round' ? tubeChoices(tube) : [tube];
  const out: Variant[] = [];
  for (const section of tubes) {
    const size =
      section.kind === 'round'
        ? section.outsideDiameter
        : section.kind === 'square'
          ? section.side
          : section.axialWidth;
    const own = 'pitch' in winding ? winding.pitch : size;
    const before = tube.kind === 'round' ? tube.outsideDiameter : size;
    const pitch = Math.max(own + (size - before), 1.1 * size);
    for (const turns of turnsOpen ? turnChoices(requirement, pitch) : [null]) {
      const next = {
        ...winding,
        ...('pitch' in winding ? { pitch } : {}),
        ...(turns === null ? {} : { turns }),
      } as typeof winding;
      const known =
        'turns' in next ? (next.turns ?? 0) : next.shape === 'stepped' ? next.insideDiameters.length : 1;
      out.push({
        requirement: { ...requirement, coil: { ...requirement.coil, tube: section, winding: next } },
        turns: known,
        tube: section,
        score: 0,
      });
    }
  }
  return out;
}

function tubeChoices(tube: Extract<TubeSection, { kind: 'round' }>): TubeSection[] {
  const near = stockTubes.filter(
    (stock) =>
      stock.outsideDiameter > 0.55 * tube.outsideDiameter &&
      stock.outsideDiameter < 1.6 * tube.outsideDiameter &&
      stock.wall >= 0.7e-3,
  );
  return [
    tube,
    ...near.map(({ outsideDiameter, wall }): TubeSection => ({ kind: 'round', outsideDiameter, wall })),
  ];
}

/** Turns whose length lies between a half and one and a half times the heated length. */
function turnChoices(requirement: Requirement, pitch: number): number[] {
  const { part, coil } = requirement;
  if (coil.winding.shape === 'pancake') return range(1, 12);
  const zone = Math.min(part.heatedLength ?? part.length, part.length);
  const most = Math.min(40, Math.max(2, Math.ceil((1.5 * zone) / pitch)));
  const least = Math.max(1, Math.round(zone / 2 / pitch));
  return range(least, most);
}

const range = (from: number, to: number) =>
  Array.from({ length: Math.max(0, to - from + 1) }, (_, i) => from + i);

/** Cheap figures of every variant; those without a setting anywhere near the range are dropped. */
function rank(variants: Variant[]): Variant[] {
  return variants
    .map((variant) => cheaply(variant))
    .filter((variant): variant is Variant => variant !== null)
    .sort((a, b) => b.score - a.score);
}

function cheaply(variant: Variant): Variant | null {
  const { requirement } = variant;
  const geometry = resolveGeometry(requirement);
  // Shapes and parts outside the method have no figures to choose by.
  if (!geometry.part || !geometry.rings) return null;
  const { process, machine } = requirement;
  const ask = (state: 'cold' | 'hot', frequency: number) =>
    cheapImpedance({
      coil: { ...geometry.coil, winding: explicitWinding(geometry.coil.winding, requirement.part) },
      part: geometry.part,
      frequency,
      state,
      startTemperatureC: process.startTemperatureC,
      targetTemperatureC: process.targetTemperatureC,
      current: 1000,
      includeLeads: false,
      setting: 'preview',
    });
  try {
    const { frequencyMin, frequencyMax } = machine.supply;
    const middle = Math.sqrt((frequencyMin ?? 5e3) * (frequencyMax ?? 1e5));
    const answers = { cold: ask('cold', middle), hot: ask('hot', middle) };
    const assumed = assumeMachine(machine, answers.hot);
    const loose = {
      frequencyMin: frequencyMin === null ? null : frequencyMin / 1.1,
      frequencyMax: frequencyMax === null ? null : frequencyMax * 1.1,
    };
    const leads = requirement.coil.leads ? 0.65e-6 * requirement.coil.leads.length : 0;
    const model = (answer: typeof answers.cold) => {
      const p = pointOf(answer);
      return coilModel([middle], [1], [[{ ...p, inductance: p.inductance + leads }]]);
    };
    const models = { cold: model(answers.cold), hot: model(answers.hot) };
    let best: { setting: RowSetting; power: number } | null = null;
    for (const setting of rowSettings(assumed, arrangements(machine.bank, 24))) {
      const point = (state: 'cold' | 'hot') =>
        operatingPoint(circuitOf(assumed, setting), models[state], assumed.limits, {
          frequency: middle,
          current: 1000,
        });
      const [cold, hot] = [point('cold'), point('hot')];
      if (!cold || !hot || !inRange(loose, cold.frequency) || !inRange(loose, hot.frequency)) continue;
      const power = Math.min(...[cold, hot].map((p) => p.state.coilCurrent ** 2 * p.point.loadResistance));
      if (!best || power > best.power) best = { setting, power };
    }
    return best
      ? { ...variant, requirement: withSetting(requirement, best.setting), score: best.power }
      : null;
  } catch (error) {
    if (error instanceof InductionInputError) return null;
    throw error;
  }
}

/** The requirement with a bank setting and tap fitted. */
export function withSetting(requirement: Requirement, setting: RowSetting): Requirement {
  const { machine } = requirement;
  const { arrangement } = setting;
  const bank =
    machine.bank.kind === 'groups'
      ? {
          ...machine.bank,
          groups: machine.bank.groups.map((group, i) => ({
            ...group,
            fitted: arrangement.unitsPerGroup[i] ?? group.fitted,
          })),
        }
      : {
          ...machine.bank,
          totals: machine.bank.totals.map((total, i) => ({
            ...total,
            fitted: arrangement.id === `total-${i}`,
          })),
        };
  const transformer =
    machine.transformer && setting.tap !== null
      ? { ...machine.transformer, fittedTap: setting.tap }
      : machine.transformer;
  return { ...requirement, machine: { ...machine, bank, transformer } };
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
