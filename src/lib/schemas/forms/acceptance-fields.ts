/** Acceptance lines: rows of the form, each in the unit of its kind. */
import type { AcceptanceKind, AcceptanceLine, Unit } from '../../induction/check/types.ts';
import { dimensionOfUnit } from '../../induction/units/dimensions.ts';
import { choice, quantity, text, type FieldGroupSpec, type FieldSpec, type Values } from './field-spec.ts';

export const mostLines = 40;

export const acceptanceKindText: Record<AcceptanceKind, string> = {
  inductance: 'Inductance of the bare coil',
  resistance: 'Resistance at frequency',
  'inside-diameter': 'Opening',
  pitch: 'Pitch',
  length: 'Length',
  hydrostatic: 'Hydrostatic test',
  flow: 'Flow at pressure',
  insulation: 'Insulation test',
  'dc-resistance': 'DC resistance',
  document: 'Document',
  other: 'Other',
};

/** Unit in which a line of a kind is judged. */
export const acceptanceUnit: Record<AcceptanceKind, Unit> = {
  inductance: 'H',
  resistance: 'ohm',
  'inside-diameter': 'm',
  pitch: 'm',
  length: 'm',
  hydrostatic: 'Pa',
  flow: 'm3/s',
  insulation: 'ohm',
  'dc-resistance': 'ohm',
  document: '1',
  other: '1',
};

export function isAcceptanceKind(kind: string): kind is AcceptanceKind {
  return Object.hasOwn(acceptanceUnit, kind);
}

const electrical: readonly AcceptanceKind[] = ['inductance', 'resistance'];

export function lineCount(values: Values): number {
  const rows = Number(values['acceptance.rows'] ?? '0');
  return Number.isInteger(rows) ? Math.min(Math.max(rows, 0), mostLines) : 0;
}

export function lineKind(values: Values, index: number): AcceptanceKind {
  const kind = values[`acceptance.${index}.kind`] ?? '';
  return isAcceptanceKind(kind) ? kind : 'other';
}

/** The fields of one line. */
export function acceptanceFields(values: Values, index: number): FieldSpec[] {
  const at = (name: string) => `acceptance.${index}.${name}`;
  const kind = lineKind(values, index);
  const dimension = dimensionOfUnit[acceptanceUnit[kind]];
  const fields: FieldSpec[] = [text(at('label'), 'What is judged', 200, { empty: 'required' })];
  if (kind === 'document') return [...fields, text(at('note'), 'Note', 1000, { rows: 2 })];
  fields.push(
    choice(at('basis'), 'Basis', [
      ['computed', 'computed'],
      ['buyer', 'our value'],
      ['golden-coil', 'golden coil'],
    ]),
    quantity(at('nominal'), 'Nominal', dimension, { empty: 'none' }),
    quantity(at('low'), 'At least', dimension, { empty: 'none' }),
    quantity(at('high'), 'At most', dimension, { empty: 'none' }),
  );
  if (electrical.includes(kind)) {
    fields.push(
      quantity(at('testFrequency'), 'Test frequency', 'frequency', { empty: 'none' }),
      quantity(at('temperatureC'), 'At temperature', 'temperature', { empty: 'none' }),
      text(at('measuringPlane'), 'Measuring plane', 200),
      text(at('leadState'), 'Lead state', 200),
    );
  }
  if (kind === 'hydrostatic') fields.push(quantity(at('holdTime'), 'Hold for', 'time', { empty: 'none' }));
  if (kind === 'flow') {
    fields.push(
      quantity(at('differentialPressure'), 'At a pressure difference of', 'pressure', { empty: 'none' }),
    );
  }
  fields.push(text(at('note'), 'Note', 1000, { rows: 2 }));
  return fields;
}

export function acceptanceGroups(values: Values): FieldGroupSpec[] {
  return Array.from({ length: lineCount(values) }, (_, index) => ({
    title: values[`acceptance.${index}.label`]?.trim() || acceptanceKindText[lineKind(values, index)],
    fields: acceptanceFields(values, index),
  }));
}

/** A line as it starts when someone adds it by hand. */
export function newLine(kind: AcceptanceKind, id: string): AcceptanceLine {
  return {
    id,
    kind,
    label: acceptanceKindText[kind],
    basis: 'buyer',
    nominal: null,
    low: null,
    high: null,
    unit: acceptanceUnit[kind],
    testFrequency: null,
    temperatureC: null,
    measuringPlane: '',
    leadState: '',
    holdTime: null,
    differentialPressure: null,
    note: '',
  };
}
