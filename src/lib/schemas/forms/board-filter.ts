/** The board's filter as it stands in the address: text with typed units, read once. */
import type { UnitSet } from '../../induction/units/dimensions.ts';
import { parseQuantity } from '../../induction/units/parse-quantity.ts';

export const boardFields = [
  'text',
  'shape',
  'material',
  'tubeMin',
  'tubeMax',
  'quantityMin',
  'quantityMax',
  'closesWithin',
] as const;
export type BoardField = (typeof boardFields)[number];

export interface ReadBoardFilter {
  filter: {
    text?: string;
    shape?: string;
    material?: string;
    tubeMin?: number;
    tubeMax?: number;
    quantityMin?: number;
    quantityMax?: number;
    /** Bids close within so many days. */
    closesWithinDays?: number;
    after?: string;
  };
  values: Record<BoardField, string>;
  errors: Partial<Record<BoardField, string>>;
}

/** Reads the filter; what cannot be read is named and left out. */
export function readBoardFilter(search: URLSearchParams, unitSet: UnitSet): ReadBoardFilter {
  const values = Object.fromEntries(
    boardFields.map((name) => [name, (search.get(name) ?? '').trim().slice(0, 200)]),
  ) as Record<BoardField, string>;
  const filter: ReadBoardFilter['filter'] = {};
  const errors: ReadBoardFilter['errors'] = {};
  if (values.text) filter.text = values.text;
  if (values.shape) filter.shape = values.shape;
  if (values.material) filter.material = values.material;
  for (const name of ['tubeMin', 'tubeMax'] as const) {
    if (!values[name]) continue;
    const length = parseQuantity(values[name], 'length', unitSet);
    if (length.ok) filter[name] = length.value;
    else errors[name] = length.message;
  }
  for (const name of ['quantityMin', 'quantityMax'] as const) {
    if (!values[name]) continue;
    if (/^\d{1,6}$/.test(values[name])) filter[name] = Number(values[name]);
    else errors[name] = 'Write a whole number of coils.';
  }
  if (values.closesWithin) {
    const days = Number(values.closesWithin);
    if (Number.isInteger(days) && days > 0 && days <= 365) filter.closesWithinDays = days;
    else errors.closesWithin = 'Choose a number of days.';
  }
  const after = search.get('after');
  if (after && /^\d{1,16}_[0-9a-f-]{36}$/.test(after)) filter.after = after;
  return { filter, values, errors };
}
