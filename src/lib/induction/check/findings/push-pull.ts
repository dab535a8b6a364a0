import { chokeLoad, pushPullPeakVoltage } from '../../tank/push-pull.ts';
import type { Rule } from '../context.ts';
import { commonPractice, finding, quantity } from './finding.ts';

const isPushPull = (context: Parameters<Rule>[0]) => context.requirement.machine.tank === 'push-pull';

/** device-voltage: π·Vdc against the rating of a device. */
export const deviceVoltage: Rule = (context) => {
  const { dcVoltage, devicePeakVoltage } = context.requirement.machine.supply;
  if (!isPushPull(context) || dcVoltage === null || devicePeakVoltage === null) return [];
  const peak = pushPullPeakVoltage(dcVoltage);
  if (peak <= 0.8 * devicePeakVoltage) return [];
  const over = peak > devicePeakVoltage;
  return [
    finding({
      code: 'device-voltage',
      severity: over ? 'blocker' : 'caution',
      safety: over,
      subject: 'machine.supply.devicePeakVoltage',
      figure: quantity(peak, 'V'),
      limit: quantity(devicePeakVoltage, 'V'),
      template: over
        ? 'Each device sees {figure} peak (π times the DC supply), above its rating of {limit}.'
        : 'Each device sees {figure} peak (π times the DC supply); less than a fifth is left to its rating of {limit}.',
      remedy:
        'Lower the DC voltage or take devices of a higher rating; twice the power at the same load needs √2 times the voltage.',
      source: 'volt-second balance of the centre-tapped stage',
    }),
  ];
};

/** choke-saturates: peak current of the feeding choke against its saturation. */
export const chokeSaturates: Rule = (context) => {
  const { supply } = context.requirement.machine;
  const row = context.ladder.find((one) => one.fitted);
  if (!isPushPull(context) || !row || supply.dcVoltage === null || supply.chokeSaturationCurrent === null)
    return [];
  const worst = [row.cold, row.hot]
    .map((state) =>
      chokeLoad(
        state.deliverablePower.value,
        supply.dcVoltage ?? 1,
        state.frequency.value,
        supply.chokeInductance,
      ),
    )
    .sort((a, b) => b.peak - a.peak)[0];
  if (!worst || worst.peak <= supply.chokeSaturationCurrent) return [];
  return [
    finding({
      code: 'choke-saturates',
      severity: 'caution',
      subject: 'machine.supply.chokeSaturationCurrent',
      figure: quantity(worst.peak, 'A'),
      limit: quantity(supply.chokeSaturationCurrent, 'A'),
      template: 'The choke carries {mean} on average and {figure} at the peak; it saturates at {limit}.',
      values: { mean: quantity(worst.mean, 'A') },
      remedy: 'A larger choke, two in parallel, or less load.',
      source: 'power over DC voltage, ripple at twice the resonance',
    }),
  ];
};

/** start-up-caution: a self-resonant stage latches when it starts on a soft supply. */
export const startUp: Rule = (context) =>
  isPushPull(context)
    ? [
        finding({
          code: 'start-up-caution',
          severity: 'caution',
          safety: true,
          subject: 'machine.tank',
          template:
            'A self-resonant stage must start on a stiff supply: if the voltage creeps up or sags, both devices latch on and burn; gate drive and its loss grow with frequency.',
          remedy:
            'Switch the supply on at full voltage with the tank connected, fuse it fast, and check the gate voltage at the running frequency.',
          source: commonPractice,
        }),
      ]
    : [];

/** load-mismatch of a self-resonant stage: it draws what its DC voltage puts over the tank and cannot hold back. */
export const pushPullOverload: Rule = (context) => {
  const { ratedPower, dcVoltage } = context.requirement.machine.supply;
  const points = context.fittedRow?.points;
  if (!isPushPull(context) || !points || ratedPower === null || dcVoltage === null) return [];
  const drawn = Math.max(points.cold.deliverable.byVoltage, points.hot.deliverable.byVoltage);
  if (drawn <= ratedPower) return [];
  return [
    finding({
      code: 'load-mismatch',
      severity: 'caution',
      subject: 'machine.supply.dcVoltage',
      figure: quantity(drawn, 'W'),
      limit: quantity(ratedPower, 'W'),
      template:
        'At {dc} the stage draws {figure} from its supply, rated {limit}: it cannot hold itself back.',
      values: { dc: quantity(dcVoltage, 'V') },
      remedy: 'Lower the DC voltage (half the power needs 1/√2 of it), or couple the part less closely.',
      fixes: [
        {
          label: 'DC voltage for the rated power',
          field: 'machine.supply.dcVoltage',
          value: Number((dcVoltage * Math.sqrt(ratedPower / drawn)).toPrecision(3)),
        },
      ],
      source: 'tank voltage π/√2 times the DC supply',
    }),
  ];
};
