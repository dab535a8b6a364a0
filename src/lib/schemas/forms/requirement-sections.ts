/** The sections of a request's form and the fields in them. */
import { acceptanceGroups } from './acceptance-fields.ts';
import { commercialGroups } from './commercial-fields.ts';
import { coilGroups } from './coil-fields.ts';
import { text, type FieldGroupSpec, type Values } from './field-spec.ts';
import { machineGroups } from './machine-fields.ts';
import {
  fixtureGroups,
  metalPartGroups,
  partGroups,
  processGroups,
  responsibilityGroup,
} from './requirement-fields.ts';

export const sectionIds = [
  'part',
  'process',
  'machine',
  'coil',
  'fixture',
  'acceptance',
  'commercial',
  'files',
] as const;
export type SectionId = (typeof sectionIds)[number];

export const sectionText: Record<SectionId, string> = {
  part: 'Part',
  process: 'Process',
  machine: 'Machine',
  coil: 'Coil',
  fixture: 'Fixture',
  acceptance: 'Acceptance',
  commercial: 'Commercial',
  files: 'Files',
};

export const titleField = text('title', 'Title of the request', 120, {
  empty: 'required',
  hint: 'What bidders read first, e.g. “Coil for 40 mm pin, hardening cell 2”.',
});

/** The groups of fields of a section, for these values. */
export function sectionGroups(section: SectionId, values: Values): readonly FieldGroupSpec[] {
  switch (section) {
    case 'part':
      return partGroups;
    case 'process':
      return processGroups;
    case 'machine':
      return machineGroups(values);
    case 'coil':
      return coilGroups;
    case 'fixture':
      return [...fixtureGroups, ...metalPartGroups(values)];
    case 'acceptance':
      return [responsibilityGroup, ...acceptanceGroups(values)];
    case 'commercial':
      return commercialGroups;
    case 'files':
      return [];
  }
}

/** The section a field belongs to. */
export function sectionOf(path: string): SectionId {
  const head = path.split('.')[0] ?? '';
  if (head === 'designResponsibility') return 'acceptance';
  return sectionIds.find((id) => id === head) ?? 'commercial';
}
