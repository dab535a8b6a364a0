import { z } from 'zod';
import { isCountryCode } from '../../domain/countries.ts';
import {
  coilShapeCapabilities,
  keysOf,
  shopTestCapabilities,
  shopWorkCapabilities,
  verifiedItems,
  type ShopCapabilities,
} from '../../domain/verification.ts';
import type { UnitSet } from '../../induction/units/dimensions.ts';
import { parseQuantity } from '../../induction/units/parse-quantity.ts';

/** Lists of a form: every value of a checkbox group, in the order of the page. */
export function listsOf(form: FormData, names: readonly string[]): Record<string, unknown> {
  const input: Record<string, unknown> = {};
  for (const name of new Set(form.keys())) {
    input[name] = names.includes(name) ? form.getAll(name) : form.get(name);
  }
  for (const name of names) input[name] ??= [];
  return input;
}

export const capabilityLists = ['shapes', 'work', 'tests', 'documents'] as const;

const choices = <T extends Record<string, string>>(table: T, message: string) =>
  z.array(z.enum(keysOf(table), message)).max(Object.keys(table).length);

const text = (what: string, max: number, min = 1) =>
  z
    .string({ error: `Enter ${what}.` })
    .trim()
    .min(min, `Enter ${what}.`)
    .max(max, `Keep ${what} below ${max} characters.`);
const optionalText = (max: number) => z.string().trim().max(max, `At most ${max} characters.`).default('');

const country = z.string().trim().toUpperCase().refine(isCountryCode, 'Choose the country.');

function length(unitSet: UnitSet, low: number, high: number) {
  return z
    .string()
    .trim()
    .default('')
    .transform((value, context) => {
      if (value === '') return null;
      const read = parseQuantity(value, 'length', unitSet);
      const message = !read.ok
        ? read.message
        : read.value < low || read.value > high
          ? `Enter a length between ${low * 1000} and ${high * 1000} mm.`
          : null;
      if (message === null && read.ok) return read.value;
      context.addIssue({ code: 'custom', message: message ?? 'Enter a length.' });
      return z.NEVER;
    });
}

/** What a fabricator declares: statement, works address and capabilities; lengths in the person's units. */
export function fabricatorProfileInput(unitSet: UnitSet) {
  return z
    .object({
      statement: text('what your shop makes, in a few sentences', 2000, 20),
      worksName: text('the name at the works address', 120),
      worksLine1: text('street and number', 120),
      worksLine2: optionalText(120),
      worksPostalCode: text('the postal code', 20),
      worksCity: text('the town', 80),
      worksRegion: optionalText(80),
      worksCountry: country,
      shapes: choices(coilShapeCapabilities, 'Choose from the list of shapes.').min(
        1,
        'Choose at least one shape that you make.',
      ),
      work: choices(shopWorkCapabilities, 'Choose from the list.'),
      tests: choices(shopTestCapabilities, 'Choose from the list.'),
      tubeMin: length(unitSet, 0.001, 0.1),
      tubeMax: length(unitSet, 0.001, 0.1),
      coilDiameterMax: length(unitSet, 0.005, 5),
      coilLengthMax: length(unitSet, 0.005, 10),
    })
    .superRefine((value, context) => {
      if (value.tubeMin !== null && value.tubeMax !== null && value.tubeMin > value.tubeMax) {
        context.addIssue({
          code: 'custom',
          path: ['tubeMax'],
          message: 'The largest tube is smaller than the smallest.',
        });
      }
    })
    .transform((value) => {
      const { shapes, work, tests, tubeMin, tubeMax, coilDiameterMax, coilLengthMax } = value;
      const capabilities: ShopCapabilities = {
        shapes,
        work,
        tests,
        tubeMin,
        tubeMax,
        coilDiameterMax,
        coilLengthMax,
      };
      return {
        statement: value.statement,
        capabilities,
        worksAddress: {
          name: value.worksName,
          line1: value.worksLine1,
          line2: value.worksLine2,
          postalCode: value.worksPostalCode,
          city: value.worksCity,
          region: value.worksRegion,
          country: value.worksCountry,
        },
      };
    });
}
export type FabricatorProfileInput = z.output<ReturnType<typeof fabricatorProfileInput>>;

export const askingInput = z.object({
  commandId: z.uuid(),
  documents: z
    .array(z.uuid())
    .min(1, 'Name at least one document that shows who you are.')
    .max(30, 'Name at most 30 documents.'),
});

const version = z.coerce.number().int().min(1);
const reasons = z
  .string()
  .trim()
  .min(10, 'Give the reasons in a sentence or more; the fabricator reads them.')
  .max(2000, 'Keep the reasons below 2000 characters.');

export const verifyInput = z.object({
  version,
  items: z
    .array(z.enum(keysOf(verifiedItems)))
    .min(1, 'Tick what exactly was verified; only that is said in the directory.'),
  untilDate: z.iso.date('Choose the date until which it holds.'),
  reasons: z.string().trim().max(2000, 'Keep the remarks below 2000 characters.').default(''),
});
export const refuseInput = z.object({ version, reasons });

export const directoryFilter = z.object({
  q: z.string().trim().max(80).catch(''),
  shape: z.enum(keysOf(coilShapeCapabilities)).nullable().catch(null),
  after: z.string().max(200).nullable().catch(null),
});
