/** The choices a proposal searches, ranked by the closed formulas over the whole ladder. */
import { cheapImpedance } from '../field/cheap.ts';
import { InductionInputError } from '../input-error.ts';
import { arrangements } from '../tank/bank.ts';
import { stockTubes } from '../shop/tube-stock.ts';
import { assumeMachine } from './assume.ts';
import { coilModel, pointOf } from './coil-model.ts';
import { circuitOf, inRange, rowSettings, type RowSetting } from './ladder.ts';
import { operatingPoint } from './operating-point.ts';
import { explicitWinding, resolveGeometry } from './resolve.ts';
import type { Requirement, TubeSection } from './types.ts';

export interface Variant {
  requirement: Requirement;
  turns: number;
  tube: TubeSection;
  /** Power into the part by the cheap formulas on the best row, W; ranks only. */
  score: number;
}

/** Every combination of what is open. */
export function variantsOf(requirement: Requirement, options: { open?: ('turns' | 'tube')[] }): Variant[] {
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
export function rank(variants: Variant[]): Variant[] {
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
