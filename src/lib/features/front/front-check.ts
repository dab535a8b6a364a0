/** A few fields over the example requirement, for a first try without an account or a form. */
import { exampleRequirement } from '$lib/induction/check/examples.ts';
import type { Requirement } from '$lib/induction/check/types.ts';
import type { Dimension, UnitSet } from '$lib/induction/units/dimensions.ts';
import { formatField } from '$lib/induction/units/format-quantity.ts';
import { parseQuantity } from '$lib/induction/units/parse-quantity.ts';

export interface FrontField {
  name: string;
  label: string;
  dimension: Dimension;
  low: number;
  high: number;
  read: (requirement: Requirement) => number;
  write: (requirement: Requirement, value: number) => void;
}

export const frontFields: readonly FrontField[] = [
  {
    name: 'partDiameter',
    label: 'Shaft diameter',
    dimension: 'length',
    low: 0.005,
    high: 0.3,
    read: (r) => r.part.outsideDiameter,
    write: (r, value) => {
      r.part.outsideDiameter = value;
    },
  },
  {
    name: 'insideDiameter',
    label: 'Coil inside diameter',
    dimension: 'length',
    low: 0.006,
    high: 0.4,
    read: (r) => ('insideDiameter' in r.coil.winding ? (r.coil.winding.insideDiameter ?? 0) : 0),
    write: (r, value) => {
      if (r.coil.winding.shape === 'helix') r.coil.winding.insideDiameter = value;
    },
  },
  {
    name: 'turns',
    label: 'Turns',
    dimension: 'number',
    low: 1,
    high: 30,
    read: (r) => ('turns' in r.coil.winding ? (r.coil.winding.turns ?? 0) : 0),
    write: (r, value) => {
      if (r.coil.winding.shape === 'helix') r.coil.winding.turns = value;
    },
  },
  {
    name: 'pitch',
    label: 'Pitch',
    dimension: 'length',
    low: 0.003,
    high: 0.1,
    read: (r) => ('pitch' in r.coil.winding ? r.coil.winding.pitch : 0),
    write: (r, value) => {
      if (r.coil.winding.shape === 'helix') r.coil.winding.pitch = value;
    },
  },
];

export interface FrontReading {
  requirement: Requirement;
  errors: Record<string, string>;
}

/** The example's values as numbers; their units stand beside the fields. */
export function startTexts(unitSet: UnitSet): Record<string, string> {
  const example = exampleRequirement();
  return Object.fromEntries(
    frontFields.map((field) => [
      field.name,
      formatField(field.read(example), field.dimension, unitSet).replace(/ [^\d]+$/, ''),
    ]),
  );
}

/** The example with what was typed; a field that cannot be read keeps the example's value and says why. */
export function readFront(texts: Record<string, string>, unitSet: UnitSet): FrontReading {
  const requirement = exampleRequirement();
  const errors: Record<string, string> = {};
  for (const field of frontFields) {
    const parsed = parseQuantity(texts[field.name] ?? '', field.dimension, unitSet);
    if (!parsed.ok) errors[field.name] = parsed.message;
    else if (parsed.value < field.low || parsed.value > field.high) {
      const ends = [field.low, field.high].map((value) => formatField(value, field.dimension, unitSet));
      errors[field.name] = `For this try: ${ends.join(' to ')}.`;
    } else field.write(requirement, parsed.value);
  }
  return { requirement, errors };
}
