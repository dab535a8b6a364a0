import type { UnitSet } from '../../induction/units/dimensions.ts';
import { mostGroups, mostTotals, rowCount } from './machine-fields.ts';
import { postedValues, withRowChange } from './posted-values.ts';

/** A machine's form body: its texts, and whether it only asked for another row of the bank. */
export function machineIntent(form: FormData): {
  values: Record<string, string>;
  unitSet: UnitSet;
  rowsChanged: boolean;
} {
  const values = postedValues(form, 'machine');
  const unitSet: UnitSet = form.get('unitSet') === 'inch' ? 'inch' : 'metric';
  const intent = String(form.get('intent') ?? 'save');
  if (intent !== 'add' && !intent.startsWith('remove-')) return { values, unitSet, rowsChanged: false };
  const totals = values['machine.bank.kind'] === 'totals';
  const list = totals ? 'machine.bank.totals' : 'machine.bank.groups';
  const rows = rowCount(values, list, totals ? mostTotals : mostGroups);
  return { values: withRowChange(values, list, rows, intent), unitSet, rowsChanged: true };
}
