import { unitStress } from '../../tank/bank.ts';
import type { CheckContext, Rule } from '../context.ts';
import { meanPower } from './power.ts';
import type { Finding, FindingCode, LadderState, Quantity } from '../types.ts';
import { commonPractice, finding, quantity } from './finding.ts';

const fittedOf = (context: CheckContext) => context.ladder.find((row) => row.fitted) ?? null;

/** Share of deliverable power that the heating needs; 1 where it is not known or not enough. */
export function neededShare(context: CheckContext): number {
  const row = fittedOf(context);
  const needed = context.heating?.meanPowerNeeded?.value ?? null;
  const mean = row ? meanPower(context, row) : null;
  return needed !== null && mean !== null && mean > 0 ? Math.min(1, needed / mean) : 1;
}

type Kind = 'voltage' | 'current' | 'kvar';
const words: Record<Kind, { code: FindingCode; name: string; verb: string; remedy: string }> = {
  voltage: {
    code: 'capacitor-voltage',
    name: 'voltage',
    verb: 'stands at',
    remedy: 'Put units in series, take units of a higher voltage, or limit the power.',
  },
  current: {
    code: 'capacitor-current',
    name: 'current',
    verb: 'carries',
    remedy: 'Spread the current over more units, or limit the power.',
  },
  kvar: {
    code: 'capacitor-kvar',
    name: 'reactive power',
    verb: 'takes',
    remedy: 'Spread it over more units, take larger ones, or limit the power.',
  },
};

/** capacitor-voltage, capacitor-current, capacitor-kvar: each unit of the fitted setting against its own limits. */
export const capacitorLimits: Rule = (context) => {
  const solved = context.fittedRow;
  if (!solved) return [];
  const share = neededShare(context);
  const out: Finding[] = [];
  const stress = (state: 'cold' | 'hot') =>
    unitStress(
      solved.setting.arrangement,
      solved.points[state].state.bankVoltage,
      solved.points[state].state.bankCurrent,
    );
  const [cold, hot] = [stress('cold'), stress('hot')];
  cold.forEach((inCold, index) => {
    const inHot = hot[index];
    if (!inHot) return;
    const { part } = inCold;
    const readings = [
      ['voltage', inCold.voltage, inHot.voltage, part.voltageLimit, 'V', Math.sqrt(share)],
      ['current', inCold.current, inHot.current, part.currentLimit, 'A', Math.sqrt(share)],
      ['kvar', inCold.reactivePower, inHot.reactivePower, part.reactivePowerLimit, 'var', share],
    ] as const;
    for (const [kind, a, b, limit, unit, scale] of readings) {
      if (limit === null || Math.max(a, b) <= limit) continue;
      const both = a * scale > limit && b * scale > limit;
      const word = words[kind];
      out.push(
        finding({
          code: word.code,
          severity: both ? 'blocker' : 'caution',
          safety: kind === 'voltage',
          subject: part.field,
          figure: quantity(Math.max(a, b), unit),
          limit: quantity(limit, unit),
          template: both
            ? `A unit of the ${part.name} ${word.verb} {figure} at deliverable power and stays above its limit of {limit} at the power needed.`
            : `A unit of the ${part.name} ${word.verb} {figure} at deliverable power, above its limit of {limit}.`,
          remedy: word.remedy,
          source: 'limits of the capacitor, separate for voltage, current and reactive power (IEC 60110-1)',
        }),
      );
    }
  });
  return out;
};

/** transformer-limit: volts per hertz or apparent power over the rating. */
export const transformerLimit: Rule = (context) => {
  const row = fittedOf(context);
  if (!row) return [];
  const share = neededShare(context);
  const out: Finding[] = [];
  for (const name of ['transformer volts per hertz', 'transformer apparent power']) {
    const of = (state: LadderState) => state.limits.find((limit) => limit.name === name);
    const [cold, hot] = [of(row.cold), of(row.hot)];
    if (!cold || !hot || (cold.met && hot.met)) continue;
    const scale = name.endsWith('hertz') ? Math.sqrt(share) : share;
    const both = [cold, hot].every((one) => one.figure.value * scale > one.limit.value);
    const figure: Quantity = cold.figure.value > hot.figure.value ? cold.figure : hot.figure;
    const hertz = name.endsWith('hertz');
    out.push(
      finding({
        code: 'transformer-limit',
        severity: both ? 'blocker' : 'caution',
        subject: hertz ? 'machine.transformer.voltsPerHertzLimit' : 'machine.transformer.apparentPowerLimit',
        figure,
        limit: cold.limit,
        template: hertz
          ? 'The transformer sees {figure} volts per hertz at deliverable power, above its {limit}: the core saturates.'
          : 'The transformer carries {figure} at deliverable power, above its {limit}.',
        remedy: hertz
          ? 'A higher frequency or a lower voltage relieves the core.'
          : 'Limit the power, or put the bank on the coil’s side.',
        source: 'rating of the transformer',
      }),
    );
  }
  return out;
};

/** Above this a water-cooled coil end to end needs insulation and long hoses (common practice). */
const coilVoltageLimit = 1000;

/** coil-voltage: end to end. */
export const coilVoltage: Rule = (context) => {
  const row = fittedOf(context);
  if (!row) return [];
  const volts = Math.max(row.cold.coilVoltage, row.hot.coilVoltage);
  if (volts <= coilVoltageLimit) return [];
  const toTap = context.tank?.coilVoltageToTap?.value ?? null;
  return [
    finding({
      code: 'coil-voltage',
      severity: 'caution',
      safety: true,
      subject: 'coil.insulation',
      figure: quantity(volts, 'V'),
      limit: quantity(coilVoltageLimit, 'V'),
      template: `The coil stands at {figure} end to end${toTap === null ? '' : ' and {toTap} to its tap'}: above {limit} hoses, supports and covers must be laid out for it.`,
      values: toTap === null ? {} : { toTap: quantity(toTap, 'V') },
      remedy:
        'Insulate the coil, lengthen the hoses, fit a guard with interlock; fewer turns lower the voltage.',
      source: commonPractice,
    }),
  ];
};

/** coil-current: copper loss that the water cannot take from the bore without boiling at the wall. */
export const coilCurrent: Rule = (context) => {
  const { water, knownWater, tank } = context;
  if (!water || !tank) return [];
  const wall = water.wallTemperature.value;
  const boiling = 100;
  if (wall <= boiling) return [];
  const current = Math.max(context.fittedRow?.points.cold.state.coilCurrent ?? 0, tank.coilCurrent.value);
  const limit = current * Math.sqrt((boiling - knownWater.inletC) / (wall - knownWater.inletC));
  return [
    finding({
      code: 'coil-current',
      severity: 'caution',
      safety: true,
      subject: 'coil.tube',
      figure: quantity(current, 'A'),
      limit: quantity(limit, 'A'),
      template: 'At {figure} the wall of the bore reaches {wall}: water boils on it above about {limit}.',
      values: { wall: quantity(wall, 'C') },
      remedy: 'A larger tube, more circuits or more turns at less current.',
      source: 'film coefficient of the water, running continuously',
    }),
  ];
};

/** tap-unbalanced: a centre tap is asked but the halves differ. */
export const tapUnbalanced: Rule = (context) => {
  const { coil } = context.requirement;
  if (!coil.centreTap || !context.resolved) return [];
  const odd = Math.abs(context.resolved.turns / 2 - Math.round(context.resolved.turns / 2)) > 1e-9;
  const total = context.tank?.coilVoltage.value ?? null;
  const half = context.tank?.coilVoltageToTap?.value ?? null;
  const share = total && half ? half / total : 0.5;
  if (!odd && Math.abs(share - 0.5) <= 0.01) return [];
  return [
    finding({
      code: 'tap-unbalanced',
      severity: 'caution',
      subject: 'coil.centreTap',
      figure: quantity(odd ? context.resolved.turns : share, '1'),
      template: odd
        ? 'A centre tap is asked of {figure} turns: it cannot leave the winding on the side of the leads and halve it.'
        : 'The tap divides the coil’s voltage {figure:%} to the rest: part or shape is not symmetric about it.',
      remedy: odd ? 'Take an even number of turns.' : 'Centre the part in the coil, or move the tap.',
      fixes:
        odd && 'turns' in coil.winding
          ? [
              {
                label: `Take ${Math.ceil(context.resolved.turns / 2) * 2} turns`,
                field: 'coil.winding.turns',
                value: Math.ceil(context.resolved.turns / 2) * 2,
              },
            ]
          : [],
      source: 'symmetry of a centre-tapped supply',
    }),
  ];
};
