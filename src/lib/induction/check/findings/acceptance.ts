import { allowedInductanceBand, measurableBand } from '../acceptance.ts';
import { halfBand } from '../figure.ts';
import type { Rule } from '../context.ts';
import type { AcceptanceLine } from '../types.ts';
import { commonPractice, finding, quantity } from './finding.ts';

interface Asked {
  line: AcceptanceLine;
  index: number;
  nominal: number;
  down: number;
  up: number;
}

function inductanceLines(context: Parameters<Rule>[0]): Asked[] {
  return context.requirement.acceptance.flatMap((line, index) => {
    if (line.kind !== 'inductance' || line.low === null || line.high === null) return [];
    const nominal = line.nominal ?? (line.low + line.high) / 2;
    return nominal > 0
      ? [{ line, index, nominal, down: 1 - line.low / nominal, up: line.high / nominal - 1 }]
      : [];
  });
}

/** acceptance-band-wide: the band asked is wider than the tank allows. */
export const wideBand: Rule = (context) => {
  const allowed = allowedInductanceBand(context);
  if (!allowed) return [];
  return inductanceLines(context)
    .filter(({ down, up }) => down > allowed.down || up > allowed.up)
    .map(({ index, nominal, down, up }) => {
      const high = up > allowed.up;
      return finding({
        code: 'acceptance-band-wide',
        severity: 'caution',
        subject: `acceptance.${index}.${high ? 'high' : 'low'}`,
        figure: quantity(high ? up : down, '1'),
        limit: quantity(high ? allowed.up : allowed.down, '1'),
        template: `A coil at the ${high ? 'upper' : 'lower'} end of the inductance band, {figure:%} off, would leave the supply’s range on the fitted setting; the tank allows {limit:%}.`,
        remedy:
          'Narrow the band, or move the bank setting so that the frequency lies further inside the range.',
        fixes: [
          {
            label: 'Take what the tank allows',
            field: `acceptance.${index}.${high ? 'high' : 'low'}`,
            value: nominal * (high ? 1 + allowed.up : 1 - allowed.down),
          },
        ],
        source: 'frequency range of the supply',
      });
    });
};

/** acceptance-band-narrow: narrower than a shop can hold or measure. */
export const narrowBand: Rule = (context) => {
  const bare = context.bareAtTest ?? context.bare;
  if (!bare) return [];
  const shop = halfBand(bare.inductance) / bare.inductance.value;
  return inductanceLines(context)
    .filter(({ down, up }) => (down + up) / 2 < measurableBand || (down + up) / 2 < 0.8 * shop)
    .map(({ index, down, up }) => {
      const half = (down + up) / 2;
      const measured = half < measurableBand;
      return finding({
        code: 'acceptance-band-narrow',
        severity: measured ? 'caution' : 'note',
        subject: `acceptance.${index}`,
        figure: quantity(half, '1'),
        limit: quantity(measured ? measurableBand : shop, '1'),
        limitIsLeast: true,
        template: measured
          ? 'The inductance band of ±{figure:%} is narrower than ±{limit:%}, what an instrument and its leads can tell apart on a coil of this size.'
          : 'The inductance band of ±{figure:%} is narrower than the ±{limit:%} that the tolerances of opening and pitch give.',
        remedy: 'Widen the band, or tighten the dimensional tolerances and expect a higher price.',
        source: measured ? commonPractice : 'tolerances carried through the field solution',
      });
    });
};
