import type { CheckContext, Rule } from '../context.ts';
import type { Finding, Fix, LadderRow } from '../types.ts';
import { finding, quantity } from './finding.ts';

/** Buttons that set a row of the ladder on the machine. */
export function rowFixes(context: CheckContext, row: LadderRow): Fix[] {
  const { machine } = context.requirement;
  const fixes: Fix[] = [];
  if (machine.bank.kind === 'groups') {
    machine.bank.groups.forEach((group, index) => {
      const units = row.unitsPerGroup[index];
      if (units !== undefined && units !== group.fitted) {
        fixes.push({
          label: `Fit ${units} units${machine.bank.kind === 'groups' && machine.bank.groups.length > 1 ? ` in group ${index + 1}` : ''}`,
          field: `machine.bank.groups.${index}.fitted`,
          value: units,
        });
      }
    });
  } else {
    machine.bank.totals.forEach((total, index) => {
      const wanted = row.id.startsWith(`total-${index}-`) || row.id === `total-${index}`;
      if (wanted !== total.fitted)
        fixes.push({
          label: wanted ? `Select ${total.label}` : `Leave ${total.label}`,
          field: `machine.bank.totals.${index}.fitted`,
          value: wanted,
        });
    });
  }
  if (machine.transformer && row.tap !== null && row.tap !== machine.transformer.fittedTap) {
    fixes.push({
      label: `Connect tap ${row.ratio}:1`,
      field: 'machine.transformer.fittedTap',
      value: row.tap,
    });
  }
  return fixes;
}

const fittedOf = (context: CheckContext) => context.ladder.find((row) => row.fitted) ?? null;

/** Relative change of diameter or turns that would bring the frequency to the limit, in words. */
function otherRemedy(f: number, limit: number): string {
  const share = (f / limit) ** 2;
  return share < 1
    ? `Or less inductance by about ${Math.round((1 - share) * 100)} %: fewer turns, a wider pitch or a closer coil.`
    : `Or more inductance by about ${Math.round((share - 1) * 100)} %: more turns, a closer pitch or a wider coil.`;
}

/** frequency-below-band and frequency-above-band: the fitted setting against the supply's range. */
export const frequencyBand: Rule = (context) => {
  const row = fittedOf(context);
  const { supply } = context.requirement.machine;
  if (!row) return [];
  const out: Finding[] = [];
  const advised = context.ladder.find((one) => one.advised && one !== row);
  for (const side of ['below', 'above'] as const) {
    const limit = side === 'below' ? supply.frequencyMin : supply.frequencyMax;
    if (limit === null) continue;
    const off = (f: number) => (side === 'below' ? f < limit : f > limit);
    const states = [row.cold.frequency, row.hot.frequency];
    const nominal = states.filter((f) => off(f.value)).length;
    const edge = states.some((f) => off(side === 'below' ? f.low : f.high));
    if (nominal === 0 && !edge) continue;
    const worst =
      side === 'below'
        ? Math.min(row.cold.frequency.value, row.hot.frequency.value)
        : Math.max(row.cold.frequency.value, row.hot.frequency.value);
    const which =
      nominal === 2
        ? 'cold and hot'
        : nominal === 1
          ? off(row.cold.frequency.value)
            ? 'cold'
            : 'hot'
          : 'at the end of its band';
    const reach =
      side === 'below' ? Math.min(...states.map((f) => f.low)) : Math.max(...states.map((f) => f.high));
    out.push(
      finding({
        code: side === 'below' ? 'frequency-below-band' : 'frequency-above-band',
        severity: nominal === 2 ? 'blocker' : 'caution',
        subject: 'machine.bank',
        figure: quantity(nominal > 0 ? worst : reach, 'Hz'),
        limit: quantity(limit, 'Hz'),
        limitIsLeast: side === 'below',
        template: `The tank runs at {cold} cold and {hot} hot; ${which} that is ${side} the supply’s ${side === 'below' ? 'lowest' : 'highest'} {limit}.`,
        values: {
          cold: quantity(row.cold.frequency.value, 'Hz'),
          hot: quantity(row.hot.frequency.value, 'Hz'),
        },
        remedy: `${advised ? `Setting “${advised.label}” runs at a frequency that fits. ` : ''}${otherRemedy(worst, limit)}`,
        fixes: advised ? rowFixes(context, advised) : [],
        source: 'frequency range of the supply',
      }),
    );
  }
  return out;
};

/** no-row-fits: no setting of bank and tap meets all limits. */
export const noRowFits: Rule = (context) => {
  if (context.ladder.length === 0 || context.ladder.some((row) => row.fits)) return [];
  const inBand = context.ladder.filter((row) => row.cold.inBand && row.hot.inBand);
  const advised = context.ladder.find((row) => row.advised);
  const frequencies = context.ladder.flatMap((row) => [row.cold.frequency.value, row.hot.frequency.value]);
  return [
    finding({
      code: 'no-row-fits',
      severity: inBand.length === 0 ? 'blocker' : 'caution',
      subject: 'machine.bank',
      template:
        inBand.length === 0
          ? 'No setting of bank and tap keeps the frequency in the supply’s range cold and hot: the ladder runs from {low} to {high}.'
          : 'No setting of bank and tap meets every limit at full power.',
      values: {
        low: quantity(Math.min(...frequencies), 'Hz'),
        high: quantity(Math.max(...frequencies), 'Hz'),
      },
      remedy:
        inBand.length === 0
          ? 'Change the turns or the opening of the coil, or the units of the bank.'
          : `Run below full power${advised ? ` on “${advised.label}”` : ''}, or spread the load over more units.`,
      fixes: advised ? rowFixes(context, advised) : [],
      source: 'bank ladder',
    }),
  ];
};
