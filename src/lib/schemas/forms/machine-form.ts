/** The machine's form: text to the API's machine and back. */
import type { Machine } from '../../induction/check/types.ts';
import type { UnitSet } from '../../induction/units/dimensions.ts';
import { machineSchema } from '../api/machine.ts';
import type { FormOutcome, Values } from './field-spec.ts';
import { readGroups, subTree, type Tree } from './form-tree.ts';
import { machineGroups } from './machine-fields.ts';
import { issuesToFields } from './issues.ts';

export interface ReadMachine extends FormOutcome {
  machine: Machine | null;
}

/** Where a range or sense error of the API's machine belongs in the form. */
const elsewhere: Record<string, string> = {
  'machine.transformer.fittedTap': 'machine.transformer.fitted',
  'machine.transformer.ratios.0': 'machine.transformer.ratios',
};

function assemble(tree: Tree, values: Values, outcome: FormOutcome): unknown {
  const machine = subTree(tree, 'machine');
  const bank = subTree(machine, 'bank');
  const fixed = subTree(machine, 'fixed');
  const transformer = subTree(machine, 'transformer');
  const ratios = Array.isArray(transformer['ratios']) ? (transformer['ratios'] as number[]) : [];
  const fitted = transformer['fitted'];
  const hasTransformer = values['machine.hasTransformer'] === 'yes';
  const fittedTap = ratios.findIndex((r) => typeof fitted === 'number' && Math.abs(r - fitted) <= 1e-9 * r);
  if (hasTransformer && typeof fitted === 'number' && ratios.length > 0 && fittedTap < 0) {
    outcome.errors['machine.transformer.fitted'] ??= 'This ratio is not one of the taps.';
  }
  return {
    ...machine,
    transformer: hasTransformer ? { ...transformer, fittedTap: Math.max(fittedTap, 0) } : null,
    fixed: { ...fixed, calibration: values['machine.isCalibrated'] === 'yes' ? fixed['calibration'] : null },
    bank:
      bank['kind'] === 'totals'
        ? { kind: 'totals', totals: bank['totals'] }
        : { kind: 'groups', groups: bank['groups'] },
    connection: (values['machine.connection.kind'] ?? '') === '' ? null : machine['connection'],
  };
}

export function readMachine(values: Values, unitSet: UnitSet): ReadMachine {
  const outcome: FormOutcome = { errors: {}, missing: [] };
  const tree: Tree = {};
  readGroups(machineGroups(values), values, unitSet, tree, outcome);
  const assembled = assemble(tree, values, outcome);
  if (Object.keys(outcome.errors).length > 0 || outcome.missing.length > 0)
    return { ...outcome, machine: null };
  const parsed = machineSchema.safeParse(assembled);
  if (!parsed.success) {
    return { ...outcome, errors: issuesToFields(parsed.error, 'machine', elsewhere), machine: null };
  }
  return { ...outcome, machine: parsed.data };
}
