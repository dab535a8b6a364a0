/** Requirement, machine and terms as the texts of their form. Apart from reading them, so that pages that only show stay light. */
import type { Commercial } from '../../domain/commercial.ts';
import type { AcceptanceLine, Requirement } from '../../induction/check/types.ts';
import type { UnitSet } from '../../induction/units/dimensions.ts';
import { acceptanceGroups } from './acceptance-fields.ts';
import { commercialGroups } from './commercial-fields.ts';
import { coilGroups } from './coil-fields.ts';
import { initialTexts, textsOf, type Tree } from './form-tree.ts';
import { machineValues, newMachineValues } from './machine-texts.ts';
import { fixtureGroups, partGroups, processGroups, responsibilityGroup } from './requirement-fields.ts';
import { sectionGroups } from './requirement-sections.ts';

/** What a new request starts with. */
export function newRequestValues(): Record<string, string> {
  return {
    ...newMachineValues(),
    ...initialTexts([...partGroups, ...processGroups, ...coilGroups, ...fixtureGroups, responsibilityGroup]),
    ...initialTexts(commercialGroups),
  };
}

/** Acceptance lines as rows of the form. */
export function acceptanceValues(
  acceptance: readonly AcceptanceLine[],
  unitSet: UnitSet,
): Record<string, string> {
  const values: Record<string, string> = { 'acceptance.rows': String(acceptance.length) };
  acceptance.forEach((line, index) => {
    values[`acceptance.${index}.id`] = line.id;
    values[`acceptance.${index}.kind`] = line.kind;
  });
  return { ...textsOf(acceptanceGroups(values), { acceptance }, unitSet), ...values };
}

/** A requirement as the texts of its form. */
export function requirementValues(requirement: Requirement, unitSet: UnitSet): Record<string, string> {
  const { part, fixture } = requirement;
  const flat = (material: Requirement['part']['material']) =>
    material.kind === 'library' ? { id: material.id } : { id: 'own', own: material.own };
  const tree: Tree = {
    ...requirement,
    part: { ...part, material: flat(part.material) },
    fixture: {
      ...fixture,
      metalParts: fixture.metalParts.map((metal) => ({ ...metal, material: flat(metal.material) })),
    },
  };
  const values: Record<string, string> = {
    ...machineValues(requirement.machine, unitSet),
    ...acceptanceValues(requirement.acceptance, unitSet),
    'fixture.metalParts.rows': String(fixture.metalParts.length),
  };
  for (const section of ['part', 'process', 'coil', 'fixture'] as const) {
    Object.assign(values, textsOf(sectionGroups(section, values), tree, unitSet));
  }
  values['designResponsibility'] = requirement.designResponsibility;
  return values;
}

export function commercialValues(commercial: Commercial, unitSet: UnitSet): Record<string, string> {
  return textsOf(commercialGroups, { commercial }, unitSet);
}
