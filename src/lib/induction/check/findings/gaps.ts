import type { Rule } from '../context.ts';
import { commonPractice, finding, quantity } from './finding.ts';

/** Clearance left for setting-up when every tolerance is against it, m. */
const setUpRoom = 0.5e-3;

/** coupling-gap-small: tolerances, expansion, runout and insulation use up the clearance. */
export const gapSmall: Rule = (context) => {
  const hot = context.mechanics?.radialClearanceHot ?? null;
  const { coil, part } = context.requirement;
  if (hot === null || hot <= 0) return [];
  const needed =
    setUpRoom +
    (coil.diameterTolerance ?? 0.5e-3) / 2 +
    (part.diameterTolerance ?? 0.1e-3) / 2 +
    (coil.insulation.kind === 'none' ? 0 : coil.insulation.thickness);
  if (hot >= needed) return [];
  return [
    finding({
      code: 'coupling-gap-small',
      severity: 'caution',
      subject: coil.winding.shape === 'bore' ? 'coil.winding.outsideDiameter' : 'coil.winding.insideDiameter',
      figure: quantity(hot, 'm'),
      limit: quantity(needed, 'm'),
      limitIsLeast: true,
      template:
        'Hot, {figure} of clearance is left on each side; tolerances, insulation and setting-up take {limit}.',
      remedy: 'Open the coil, tighten the tolerances, guide the part, or insulate thinner.',
      source: 'sum of tolerances, thermal expansion and runout',
    }),
  ];
};

/** coupling-gap-large: a gap beyond what couples well. */
export const gapLarge: Rule = (context) => {
  const cold = context.mechanics?.radialClearanceCold ?? null;
  const { part, coil } = context.requirement;
  if (cold === null) return [];
  const limit = Math.max(
    8e-3,
    0.2 * (coil.winding.shape === 'bore' ? part.insideDiameter : part.outsideDiameter),
  );
  if (cold <= limit) return [];
  return [
    finding({
      code: 'coupling-gap-large',
      severity: 'note',
      subject: coil.winding.shape === 'bore' ? 'coil.winding.outsideDiameter' : 'coil.winding.insideDiameter',
      figure: quantity(cold, 'm'),
      limit: quantity(limit, 'm'),
      template:
        'The gap of {figure} per side is large: above about {limit} much of the field passes by the part.',
      remedy: 'A closer coil heats faster with less current.',
      source: `${commonPractice}: 1.5 to 5 mm for small parts, more for hot or insulated ones`,
    }),
  ];
};

/** Voltage that a millimetre between bare turns holds in a wet, scaly shop, V rms. */
const voltsPerMillimetre = 100;

/** turn-insulation-needed: clearance against the voltage of a turn. */
export const turnInsulation: Rule = (context) => {
  const gap = context.mechanics?.clearanceBetweenTurns ?? null;
  const { coil } = context.requirement;
  const row = context.ladder.find((one) => one.fitted);
  const answer = context.models?.nominal.hot;
  if (gap === null || !row || !answer || coil.insulation.kind !== 'none') return [];
  const total = answer.turnVoltage.reduce((sum, v) => sum + v, 0);
  const worstShare = total > 0 ? Math.max(...answer.turnVoltage) / total : 1;
  const volts = worstShare * Math.max(row.cold.coilVoltage, row.hot.coilVoltage);
  const needed = volts / voltsPerMillimetre / 1000;
  if (gap >= needed) return [];
  return [
    finding({
      code: 'turn-insulation-needed',
      severity: 'caution',
      subject: 'coil.insulation',
      figure: quantity(gap, 'm'),
      limit: quantity(needed, 'm'),
      limitIsLeast: true,
      template:
        'Neighbouring turns stand {volts} apart with {figure} of air between bare copper; {limit} is wanted in a wet shop.',
      values: { volts: quantity(volts, 'V') },
      remedy: 'Sleeve or coat the turns, or widen the pitch.',
      fixes: [{ label: 'Sleeve the turns', field: 'coil.insulation.kind', value: 'sleeve' }],
      source: `${commonPractice}: 100 V rms per millimetre`,
    }),
  ];
};
