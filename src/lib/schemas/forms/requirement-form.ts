/**
 * The request's form: text to the API's requirement and commercial terms. What is half typed stays
 * text; the requirement exists as soon as everything it needs can be read.
 */
import type { Commercial } from '../../domain/commercial.ts';
import type { Machine, Requirement } from '../../induction/check/types.ts';
import type { UnitSet } from '../../induction/units/dimensions.ts';
import { commercialSchema } from '../api/commercial.ts';
import { requirementSchema } from '../api/requirement.ts';
import { acceptanceUnit, lineCount, lineKind } from './acceptance-fields.ts';
import { commercialGroups } from './commercial-fields.ts';
import type { FormOutcome, Values } from './field-spec.ts';
import { readGroups, subTree, type Tree } from './form-tree.ts';
import { issuesToFields } from './issues.ts';
import { readMachine } from './machine-form.ts';
import { sectionGroups } from './requirement-sections.ts';

function isHollow(values: Values): boolean {
  return values['part.form'] === 'tube' || values['part.form'] === 'ring';
}

function materialOf(material: Tree): unknown {
  return material['id'] === 'own'
    ? { kind: 'own', own: material['own'] }
    : { kind: 'library', id: material['id'] };
}

function lines(tree: Tree, values: Values): unknown[] {
  const list = Array.isArray(tree['acceptance']) ? (tree['acceptance'] as Tree[]) : [];
  return Array.from({ length: lineCount(values) }, (_, index) => {
    const kind = lineKind(values, index);
    const line = list[index] ?? {};
    return {
      basis: 'buyer',
      nominal: null,
      low: null,
      high: null,
      testFrequency: null,
      temperatureC: null,
      measuringPlane: '',
      leadState: '',
      holdTime: null,
      differentialPressure: null,
      ...line,
      id: values[`acceptance.${index}.id`] || `line-${index + 1}`,
      kind,
      unit: acceptanceUnit[kind],
    };
  });
}

function assemble(tree: Tree, values: Values, machine: Machine | null, outcome: FormOutcome): unknown {
  const part = subTree(tree, 'part');
  const coil = subTree(tree, 'coil');
  const leads = subTree(coil, 'leads');
  const fixture = subTree(tree, 'fixture');
  const hasLength = leads['length'] !== null;
  const hasSpacing = leads['spacing'] !== null;
  if (hasLength !== hasSpacing) {
    outcome.missing.push(hasLength ? 'coil.leads.spacing' : 'coil.leads.length');
  }
  const metal = Array.isArray(fixture['metalParts']) ? (fixture['metalParts'] as Tree[]) : [];
  return {
    machine,
    part: {
      ...part,
      material: materialOf(subTree(part, 'material')),
      insideDiameter: isHollow(values) ? part['insideDiameter'] : 0,
    },
    process: tree['process'],
    coil: {
      ...coil,
      leads: hasLength && hasSpacing ? leads : null,
      support: { count: 0, ...dropNull(subTree(coil, 'support')) },
      insulation: { thickness: 0, ...dropNull(subTree(coil, 'insulation')) },
    },
    fixture: {
      ...fixture,
      metalParts: metal.map((one) => ({ ...one, material: materialOf(subTree(one, 'material')) })),
    },
    acceptance: lines(tree, values),
    designResponsibility: tree['designResponsibility'],
  };
}

function dropNull(tree: Tree): Tree {
  return Object.fromEntries(Object.entries(tree).filter(([, value]) => value !== null));
}

export interface ReadRequest extends FormOutcome {
  requirement: Requirement | null;
  commercial: Commercial | null;
}

/** Reads part, process, machine, coil, fixture and acceptance; null until all of it can be read. */
export function readRequirement(
  values: Values,
  unitSet: UnitSet,
): FormOutcome & { requirement: Requirement | null } {
  const outcome: FormOutcome = { errors: {}, missing: [] };
  const tree: Tree = {};
  for (const section of ['part', 'process', 'coil', 'fixture', 'acceptance'] as const) {
    readGroups(sectionGroups(section, values), values, unitSet, tree, outcome);
  }
  const machine = readMachine(values, unitSet);
  Object.assign(outcome.errors, machine.errors);
  outcome.missing.push(...machine.missing);
  const assembled = assemble(tree, values, machine.machine, outcome);
  if (Object.keys(outcome.errors).length > 0 || outcome.missing.length > 0) {
    return { ...outcome, requirement: null };
  }
  const parsed = requirementSchema.safeParse(assembled);
  if (!parsed.success) {
    return {
      ...outcome,
      errors: issuesToFields(parsed.error, '', { 'part.material.id': 'part.material.id' }),
      requirement: null,
    };
  }
  return { ...outcome, requirement: parsed.data };
}

export function readCommercial(
  values: Values,
  unitSet: UnitSet,
): FormOutcome & { commercial: Commercial | null } {
  const outcome: FormOutcome = { errors: {}, missing: [] };
  const tree: Tree = {};
  readGroups(commercialGroups, values, unitSet, tree, outcome);
  if (Object.keys(outcome.errors).length > 0 || outcome.missing.length > 0) {
    return { ...outcome, commercial: null };
  }
  const parsed = commercialSchema.safeParse(tree['commercial']);
  if (!parsed.success) {
    return { ...outcome, errors: issuesToFields(parsed.error, 'commercial'), commercial: null };
  }
  return { ...outcome, commercial: parsed.data };
}

/** Reads the whole request. */
export function readRequest(values: Values, unitSet: UnitSet): ReadRequest {
  const technical = readRequirement(values, unitSet);
  const commercial = readCommercial(values, unitSet);
  const missing = [...technical.missing, ...commercial.missing];
  if ((values['title'] ?? '').trim() === '') missing.unshift('title');
  return {
    errors: { ...technical.errors, ...commercial.errors },
    missing,
    requirement: technical.requirement,
    commercial: commercial.commercial,
  };
}
