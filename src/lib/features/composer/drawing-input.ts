/** Coil and part as far as they are typed, for the drawing: it draws what it can and says what it cannot. */
import type { Coil, Workpiece } from '$lib/induction/check/types.ts';
import type { UnitSet } from '$lib/induction/units/dimensions.ts';
import type { FormOutcome, Values } from '$lib/schemas/forms/field-spec.ts';
import { readGroups, subTree, type Tree } from '$lib/schemas/forms/form-tree.ts';
import { sectionGroups } from '$lib/schemas/forms/requirement-sections.ts';

export function drawingInput(values: Values, unitSet: UnitSet): { coil: Coil; part: Workpiece } {
  const outcome: FormOutcome = { errors: {}, missing: [] };
  const tree: Tree = {};
  readGroups(sectionGroups('part', values), values, unitSet, tree, outcome);
  readGroups(sectionGroups('coil', values), values, unitSet, tree, outcome);
  const part = subTree(tree, 'part');
  const coil = subTree(tree, 'coil');
  const leads = subTree(coil, 'leads');
  const hollow = values['part.form'] === 'tube' || values['part.form'] === 'ring';
  // Open values are null here although the types want numbers: the drawing takes them as not given.
  return {
    coil: { ...coil, leads: leads['length'] !== null && leads['spacing'] !== null ? leads : null },
    part: { ...part, insideDiameter: hollow ? part['insideDiameter'] : 0 },
  } as unknown as { coil: Coil; part: Workpiece };
}
