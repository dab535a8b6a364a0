/** A machine as the texts of its form. */
import type { Machine } from '../../induction/check/types.ts';
import type { UnitSet } from '../../induction/units/dimensions.ts';
import { initialTexts, textsOf, type Tree } from './form-tree.ts';
import { machineGroups } from './machine-fields.ts';

export function newMachineValues(): Record<string, string> {
  return initialTexts(machineGroups({}));
}

export function machineValues(machine: Machine, unitSet: UnitSet): Record<string, string> {
  const { transformer, bank, fixed } = machine;
  const values: Record<string, string> = {
    'machine.hasTransformer': transformer ? 'yes' : 'no',
    'machine.isCalibrated': fixed.calibration ? 'yes' : 'no',
    'machine.bank.kind': bank.kind,
    ...(bank.kind === 'groups'
      ? { 'machine.bank.groups.rows': String(bank.groups.length) }
      : { 'machine.bank.totals.rows': String(bank.totals.length) }),
  };
  const fitted = transformer ? transformer.ratios[transformer.fittedTap] : null;
  const tree: Tree = {
    machine: { ...machine, transformer: transformer ? { ...transformer, fitted } : null },
  };
  return { ...textsOf(machineGroups(values), tree, unitSet), ...values };
}
