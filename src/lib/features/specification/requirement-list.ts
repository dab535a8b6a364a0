/** A requirement as names and values, by the same table of fields that the form is made of. */
import type { Requirement } from '$lib/induction/check/types.ts';
import { dimensionTable, type UnitSet } from '$lib/induction/units/dimensions.ts';
import type { FieldSpec, Values } from '$lib/schemas/forms/field-spec.ts';
import { sectionGroups, sectionText, type SectionId } from '$lib/schemas/forms/requirement-sections.ts';
import { requirementValues } from '$lib/schemas/forms/requirement-texts.ts';

export interface ListedGroup {
  title: string;
  items: { term: string; value: string; path: string }[];
}
export interface ListedSection {
  id: SectionId;
  title: string;
  groups: ListedGroup[];
}

const emptyText: Record<FieldSpec['empty'], string> = {
  required: '–',
  'not-known': 'not known',
  none: 'not asked',
  proposed: 'proposed by the checker',
};

function shown(field: FieldSpec, values: Values, unitSet: UnitSet): string {
  const text = (values[field.path] ?? '').trim();
  if (field.kind === 'flag') return text === 'yes' ? 'yes' : 'no';
  if (text === '') return emptyText[field.empty];
  if (field.kind === 'choice') return field.options.find((option) => option.value === text)?.label ?? text;
  if (field.kind === 'plain' && field.unit) return `${text} ${field.unit}`;
  if (field.kind === 'quantity') {
    const unit = dimensionTable[field.dimension].field[unitSet];
    return unit === '°' ? `${text}${unit}` : `${text} ${unit}`.trimEnd();
  }
  return text;
}

/** The technical sections in a reader's units; acceptance lines are listed apart, as a table. */
export function requirementSections(requirement: Requirement, unitSet: UnitSet): ListedSection[] {
  const values = requirementValues(requirement, unitSet);
  const ids: SectionId[] = ['part', 'process', 'coil', 'machine', 'fixture'];
  return ids.map((id) => ({
    id,
    title: sectionText[id],
    groups: sectionGroups(id, values)
      .map((group) => ({
        title: group.title,
        items: group.fields
          .filter((field) => !field.when || field.when(values))
          .filter((field) => field.empty !== 'none' || (values[field.path] ?? '') !== '')
          .map((field) => ({ term: field.label, value: shown(field, values, unitSet), path: field.path })),
      }))
      .filter((group) => group.items.length > 0),
  }));
}
