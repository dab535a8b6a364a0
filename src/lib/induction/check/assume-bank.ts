/** What is not known of the bank's units. */
import { defaultLossTangent } from '../tank/bank.ts';
import type { Assume } from './assume.ts';
import type { Machine } from './types.ts';

/** Loss and limits of the bank's units. */
export function bankAnswers(machine: Machine, assume: Assume): void {
  const { bank } = machine;
  const limits = (field: string, name: string, values: readonly (number | null)[]) => {
    if (values.some((value) => value !== null)) return;
    assume({
      field,
      name: `limits of ${name} (voltage, current, reactive power)`,
      value: null,
      band: 0,
      severity: 'caution',
      howToFind: 'Read them from the label or the data sheet of the capacitor.',
    });
  };
  if (bank.kind === 'totals') {
    bank.totals.forEach((total, index) =>
      limits(`machine.bank.totals.${index}`, `the bank total ${total.label}`, [
        total.voltageLimit,
        total.currentLimit,
        total.reactivePowerLimit,
      ]),
    );
    return;
  }
  bank.groups.forEach((group, index) => {
    const name = bank.groups.length > 1 ? `a unit of group ${index + 1}` : 'a unit';
    limits(`machine.bank.groups.${index}`, name, [
      group.unitVoltageLimit,
      group.unitCurrentLimit,
      group.unitReactivePowerLimit,
    ]);
    if (group.lossTangent === null) {
      assume({
        field: `machine.bank.groups.${index}.lossTangent`,
        name: `loss tangent of ${name}`,
        value: { value: defaultLossTangent, unit: '1' },
        band: 0.6,
        howToFind: 'Read it from the data sheet of the capacitor at the running frequency.',
      });
    }
  });
}
