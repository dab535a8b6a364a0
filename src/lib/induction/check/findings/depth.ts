import type { Rule } from '../context.ts';
import { heatedArea, timeAsked } from '../heating-figures.ts';
import type { Finding } from '../types.ts';
import { commonPractice, finding, quantity } from './finding.ts';

/** Diameter (or twice the wall) over skin depth below which the two sides of the part cancel. */
const leastRatio = 3;

/** part-too-thin-for-frequency: the part is too thin over skin depth to couple. */
export const partTooThin: Rule = (context) => {
  const { skin, tank } = context;
  if (!skin || !tank) return [];
  const ratio = skin.diameterOverDepthHot;
  if (ratio >= leastRatio) return [];
  const wanted = tank.operatingFrequency.value * (3.5 / ratio) ** 2;
  const both = skin.diameterOverDepthCold < leastRatio;
  return [
    finding({
      code: 'part-too-thin-for-frequency',
      severity: 'caution',
      subject: 'part.outsideDiameter',
      figure: quantity(ratio, '1'),
      limit: quantity(leastRatio, '1'),
      limitIsLeast: true,
      template: `The ${both ? '' : 'hot '}part is only {figure} skin depths thick; below {limit} the currents on both sides cancel. About {frequency} would couple.`,
      values: { frequency: quantity(wanted, 'Hz') },
      remedy: 'Take a higher frequency, or expect low efficiency and long heating.',
      source: 'power function of a cylinder, largest at 3.5 skin depths',
    }),
  ];
};

/** frequency-too-high-for-depth and frequency-too-low-for-depth: 15 000/x² to 250 000/x² Hz, x in mm. */
export const frequencyForDepth: Rule = (context) => {
  const depth = context.requirement.part.depthWanted;
  const f = context.tank?.operatingFrequency.value;
  if (depth === null || f === undefined || !context.skin) return [];
  const mm = depth * 1e3;
  const low = 15e3 / mm ** 2;
  const high = 250e3 / mm ** 2;
  if (f >= low && f <= high) return [];
  const tooHigh = f > high;
  return [
    finding({
      code: tooHigh ? 'frequency-too-high-for-depth' : 'frequency-too-low-for-depth',
      severity: 'caution',
      subject: 'part.depthWanted',
      figure: quantity(f, 'Hz'),
      limit: quantity(tooHigh ? high : low, 'Hz'),
      limitIsLeast: !tooHigh,
      template: tooHigh
        ? 'At {figure} the hot skin depth is {skin}: for a depth of {depth} heat must be conducted in; up to {limit} is usual.'
        : 'At {figure} the hot skin depth is {skin}, deeper than the {depth} asked: more than the case gets hot; from {limit} is usual.',
      values: { skin: quantity(context.skin.partHot.value, 'm'), depth: quantity(depth, 'm') },
      remedy: tooHigh
        ? 'More capacitance or inductance lowers the frequency; or heat longer at less power.'
        : 'Less capacitance raises the frequency; or heat shorter at more power.',
      source: `${commonPractice}: 15 000/x² to 250 000/x² Hz with x in mm`,
    }),
  ];
};

/** Power density on the heated surface that the process runs at: what is needed, at most what is deliverable, W/m². */
function surfaceDensity(context: Parameters<Rule>[0]): number | null {
  const row = context.ladder.find((one) => one.fitted);
  if (!row) return null;
  const most = Math.max(row.cold.powerIntoPart, row.hot.powerIntoPart);
  const needed = context.heating?.meanPowerNeeded?.value ?? most;
  return Math.min(most, needed) / heatedArea(context.requirement.part);
}

/**
 * Surface temperature when the target is met, °C. Through heating: the mean reaches the target, and the quasi-steady
 * profile of a cylinder puts the surface p·R/(4k) above it. To a depth: conduction from the mean of the heat source at
 * δ/2 down to the depth, p·(x − δ/2)/k.
 */
export function surfaceEstimate(context: Parameters<Rule>[0]): number | null {
  const { material } = context.geometry;
  const { part, process } = context.requirement;
  const density = surfaceDensity(context);
  if (!material || density === null || !context.skin) return null;
  const k = material.conductivity(process.targetTemperatureC);
  if (part.depthWanted !== null) {
    const reach = Math.max(0, part.depthWanted - context.skin.partHot.value / 2);
    return process.targetTemperatureC + (density * reach) / k;
  }
  const wall = part.form === 'disc' ? part.length : (part.outsideDiameter - part.insideDiameter) / 2;
  const source = Math.min(1, context.skin.partHot.value / wall);
  return process.targetTemperatureC + ((density * wall) / (4 * k)) * (1 - source) ** 2;
}

/** surface-overheats: the surface passes the highest temperature allowed before the target is met. */
export const surfaceOverheats: Rule = (context) => {
  const { process } = context.requirement;
  const limit = process.highestSurfaceTemperatureC;
  const surface = surfaceEstimate(context);
  if (limit === null || surface === null || surface <= limit) return [];
  const asked = timeAsked(process);
  return [
    finding({
      code: 'surface-overheats',
      severity: 'caution',
      subject: 'process.highestSurfaceTemperatureC',
      figure: quantity(surface, 'C'),
      limit: quantity(limit, 'C'),
      template:
        'The surface reaches about {figure} by the time the target is met, above the {limit} allowed.',
      remedy: `Heat slower${asked === null ? '' : ' than the time asked'}, at a lower frequency, or with a pause to let the heat spread; the heating run shows the curve.`,
      source: 'quasi-steady conduction; an estimate',
    }),
  ];
};

/** near-melting: target or surface close to the solidus. */
export const nearMelting: Rule = (context) => {
  const { material } = context.geometry;
  const { process } = context.requirement;
  const solidus = material?.solidusC ?? null;
  if (solidus === null || process.purpose === 'melting') return [];
  const hottest = Math.max(process.targetTemperatureC, surfaceEstimate(context) ?? -Infinity);
  if (hottest < solidus - 50) return [];
  const melts = process.targetTemperatureC >= solidus;
  return [
    finding({
      code: 'near-melting',
      severity: melts ? 'blocker' : 'caution',
      safety: true,
      subject: 'process.targetTemperatureC',
      figure: quantity(hottest, 'C'),
      limit: quantity(solidus, 'C'),
      template: melts
        ? 'The target is above {limit}, where the material begins to melt.'
        : 'The surface comes to about {figure}; the material begins to melt at {limit}.',
      remedy: melts
        ? 'Lower the target, or say that the purpose is melting.'
        : 'Heat slower, control the surface temperature, keep edges out of the strongest field.',
      source: 'solidus of the material',
    }),
  ];
};

/** curie-crossing: the tank detunes when the part turns non-magnetic. */
export const curieCrossing: Rule = (context) => {
  const curie = context.geometry.material?.magnetisation?.curieC ?? null;
  const { process } = context.requirement;
  const row = context.ladder.find((one) => one.fitted);
  if (curie === null || !row || process.startTemperatureC >= curie || process.targetTemperatureC <= curie)
    return [];
  const stays = row.cold.inBand && row.hot.inBand;
  const out: Finding[] = [
    finding({
      code: 'curie-crossing',
      severity: stays ? 'note' : 'caution',
      subject: 'process.targetTemperatureC',
      figure: quantity(row.hot.frequency.value, 'Hz'),
      template: `At {curie} the part turns non-magnetic and the tank goes from {cold} to {hot}; ${stays ? 'both are in the supply’s range.' : 'it leaves the supply’s range.'}`,
      values: {
        curie: quantity(curie, 'C'),
        cold: quantity(row.cold.frequency.value, 'Hz'),
        hot: quantity(row.hot.frequency.value, 'Hz'),
      },
      remedy: stays
        ? 'The supply must follow this range without tripping.'
        : 'Choose a setting whose frequencies both lie in the range.',
      source: 'Curie temperature of the material',
    }),
  ];
  return out;
};
