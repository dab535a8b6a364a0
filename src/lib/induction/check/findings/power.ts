import type { CheckContext, Rule } from '../context.ts';
import { coldShare, meanPartPower, timeAsked } from '../heating-figures.ts';
import type { LadderRow } from '../types.ts';
import { rowFixes } from './frequency.ts';
import { commonPractice, finding, quantity } from './finding.ts';

/** Mean power into the part over the cycle on a row, W. */
export function meanPower(context: CheckContext, row: LadderRow): number | null {
  const { material } = context.geometry;
  if (!material) return null;
  const power = { cold: row.cold.powerIntoPart, hot: row.hot.powerIntoPart };
  return power.cold > 0 && power.hot > 0
    ? meanPartPower(power, coldShare(context.requirement.process, material))
    : null;
}

const fittedOf = (context: CheckContext) => context.ladder.find((row) => row.fitted) ?? null;

/** The row with most mean power among those that fit, when it is clearly better than the fitted one. */
function betterRow(context: CheckContext, fitted: LadderRow): LadderRow | null {
  const now = meanPower(context, fitted) ?? 0;
  const rows = context.ladder.filter((row) => row.fits && (meanPower(context, row) ?? 0) > 1.1 * now);
  return rows.sort((a, b) => (meanPower(context, b) ?? 0) - (meanPower(context, a) ?? 0))[0] ?? null;
}

/** load-mismatch: voltage or current limit is reached before the power needed, or before half the rated power. */
export const loadMismatch: Rule = (context) => {
  const row = fittedOf(context);
  if (!row) return [];
  const limited = [row.cold, row.hot].filter(
    (state) => state.limitedBy === 'voltage' || state.limitedBy === 'current',
  );
  if (limited.length === 0) return [];
  const needed = context.heating?.meanPowerNeeded?.value ?? null;
  const mean = meanPower(context, row);
  const short = needed !== null && mean !== null && mean < needed;
  const rated = context.requirement.machine.supply.ratedPower;
  const least = Math.min(row.cold.deliverablePower.value, row.hot.deliverablePower.value);
  if (!short && (rated === null || least >= 0.5 * rated)) return [];
  const state = row.cold.deliverablePower.value <= row.hot.deliverablePower.value ? row.cold : row.hot;
  const better = betterRow(context, row);
  const by =
    state.limitedBy === 'voltage'
      ? 'voltage'
      : state.limitedBy === 'current'
        ? 'current'
        : limited[0]?.limitedBy;
  return [
    finding({
      code: 'load-mismatch',
      severity: short ? 'caution' : 'note',
      subject: context.requirement.machine.transformer ? 'machine.transformer.fittedTap' : 'machine.bank',
      figure: quantity(least, 'W'),
      limit: rated === null ? null : quantity(rated, 'W'),
      limitIsLeast: true,
      template:
        `The supply reaches its ${by} limit at {figure} when the part is ${state === row.cold ? 'cold' : 'hot'}` +
        (rated === null ? '.' : ', of {limit} rated.') +
        (short ? ' That is less than the part needs.' : ''),
      remedy: better
        ? `Setting “${better.label}” matches better.`
        : by === 'voltage'
          ? 'More capacitance, a lower transformer ratio or fewer turns lower the impedance that the supply sees.'
          : 'Less capacitance, a higher transformer ratio or more turns raise the impedance that the supply sees.',
      fixes: better ? rowFixes(context, better) : [],
      source: 'limits at the inverter output',
    }),
  ];
};

/** power-short: the power into the part is less than the heating needs. */
export const powerShort: Rule = (context) => {
  const row = fittedOf(context);
  const { heating } = context;
  if (!row || !heating) return [];
  const mean = meanPower(context, row);
  if (mean === null) return [];
  const never = row.hot.powerIntoPart <= heating.surfaceLoss.value;
  const needed = heating.meanPowerNeeded?.value ?? null;
  if (!never && (needed === null || mean >= needed)) return [];
  const better = betterRow(context, row);
  const remedy = better
    ? `Setting “${better.label}” puts more power into the part.`
    : 'Allow more time, heat less of the part, match the load better, or take a larger supply.';
  if (never) {
    return [
      finding({
        code: 'power-short',
        severity: 'blocker',
        subject: 'process.targetTemperatureC',
        figure: quantity(row.hot.powerIntoPart, 'W'),
        limit: quantity(heating.surfaceLoss.value, 'W'),
        limitIsLeast: true,
        template: 'The target is out of reach: the hot part gets {figure} and its surface loses {limit}.',
        remedy,
        fixes: better ? rowFixes(context, better) : [],
        source: 'energy balance',
      }),
    ];
  }
  return [
    finding({
      code: 'power-short',
      severity: 'caution',
      subject: 'process.time',
      figure: quantity(mean, 'W'),
      limit: quantity(needed ?? 0, 'W'),
      limitIsLeast: true,
      template: `The part gets {figure} on average and needs {limit} to reach its target in the time asked${heating.timeAtDeliverablePower ? '; it would take {time}.' : '.'}`,
      values: heating.timeAtDeliverablePower
        ? { time: quantity(heating.timeAtDeliverablePower.value, 's') }
        : {},
      remedy,
      fixes: better ? rowFixes(context, better) : [],
      source: 'energy balance',
    }),
  ];
};

/** time-short: the nominal power is enough, but not at the ends of the bands. */
export const timeShort: Rule = (context) => {
  const asked = timeAsked(context.requirement.process);
  const time = context.heating?.timeAtDeliverablePower;
  if (asked === null || !time || time.value > asked || time.high <= asked) return [];
  return [
    finding({
      code: 'time-short',
      severity: 'note',
      subject: context.requirement.process.time === null ? 'process.partsPerHour' : 'process.time',
      figure: quantity(time.high, 's'),
      limit: quantity(asked, 's'),
      template:
        'The heating takes {time} by the nominal figures, but up to {figure} within their bands; {limit} is asked.',
      values: { time: quantity(time.value, 's') },
      remedy: 'Keep some power or time in reserve, or run the heating transient.',
      source: 'energy balance',
    }),
  ];
};

/** coil-efficiency-low: most of the power stays in the copper. */
export const lowEfficiency: Rule = (context) => {
  const { hot, cold } = context;
  if (!hot || !cold) return [];
  const least = Math.min(hot.efficiency.value, cold.efficiency.value);
  if (least >= 0.5) return [];
  return [
    finding({
      code: 'coil-efficiency-low',
      severity: 'caution',
      subject: 'coil.winding',
      figure: quantity(least, '1'),
      limit: quantity(0.5, '1'),
      limitIsLeast: true,
      template:
        'Only {figure:%} of the power at the coil reaches the part; the rest heats the copper and the water.',
      remedy: 'A closer coil, more turns over the heated length or a higher frequency couple better.',
      source: commonPractice,
    }),
  ];
};

/** q-out-of-range: a tank too damped to start or too sharp to hold. */
export const qOutOfRange: Rule = (context) => {
  const q = context.tank?.q.value;
  if (q === undefined || (q >= 2 && q <= 60)) return [];
  const low = q < 2;
  return [
    finding({
      code: 'q-out-of-range',
      severity: 'caution',
      subject: 'coil.winding',
      figure: quantity(q, '1'),
      limit: quantity(low ? 2 : 60, '1'),
      limitIsLeast: low,
      template: low
        ? 'The loaded tank has a Q of {figure}: below {limit} it hardly rings, and the supply may not hold resonance.'
        : 'The loaded tank has a Q of {figure}: above {limit} nearly all of its current only circulates.',
      remedy: low
        ? 'More fixed inductance or fewer turns close to the part raise Q.'
        : 'A closer coil puts more of the power into the part.',
      source: commonPractice,
    }),
  ];
};
