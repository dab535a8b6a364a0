import type { UnitSet } from '../../induction/units/dimensions.ts';
import type { FieldSpec, Values } from './field-spec.ts';
import { textInSet } from './read-field.ts';
import { sectionGroups, sectionIds } from './requirement-sections.ts';

/** Every field of the request's form, shown or not. */
export function allFields(values: Values): FieldSpec[] {
  return sectionIds.flatMap((section) => sectionGroups(section, values).flatMap((group) => group.fields));
}

/**
 * The texts of a form in another unit set: bare numbers take their value in the new set, so that
 * changing the set never changes what is meant; text with a unit of its own stays.
 */
export function valuesInSet(values: Values, from: UnitSet, to: UnitSet): Record<string, string> {
  const converted: Record<string, string> = { ...values };
  if (from === to) return converted;
  for (const field of allFields(values)) {
    const typed = values[field.path];
    if (typed === undefined || typed.trim() === '') continue;
    if (field.kind === 'quantity') converted[field.path] = textInSet(typed, field.dimension, from, to);
    else if (field.kind === 'lengths') {
      converted[field.path] = typed
        .split(/;|,\s+/)
        .map((item) => textInSet(item.trim(), 'length', from, to))
        .join('; ');
    }
  }
  return converted;
}
