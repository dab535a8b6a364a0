import { z } from 'zod';
import { addressPurposes } from '../../domain/address.ts';
import { isCountryCode } from '../../domain/countries.ts';
import { currencies, parseAmount } from '../../domain/money.ts';
import { buyerRoles, fabricatorRoles, type Role } from '../../domain/roles.ts';
import { emailField, timeZoneField } from './people.ts';

const line = (limit: number) =>
  z
    .string()
    .trim()
    .max(limit, `At most ${limit} characters.`)
    .refine((text) => !/\p{Cc}/u.test(text), 'This field takes one line of text.');

const companyName = line(120)
  .min(2, 'Enter the name of the company.')
  .refine((name) => !/[<>]/.test(name), 'A name has no angle brackets.');

const website = line(200).refine((text) => {
  if (text === '') return true;
  const parsed = z.url({ protocol: /^https?$/ }).safeParse(text);
  return parsed.success;
}, 'Enter a whole address such as https://works.example, or nothing.');

const version = z.coerce.number().int().min(1);
const id = z.uuid('This is not a valid id.');

export const createCompanyForm = z.object({
  commandId: z.uuid(),
  kind: z.enum(['buyer', 'fabricator'], 'Choose what the company does here.'),
  name: companyName,
  currency: z.enum(currencies, 'Choose a currency.'),
  timeZone: timeZoneField,
});

export const updateCompanyForm = z.object({
  name: companyName,
  timeZone: timeZoneField,
  taxNumber: line(40),
  website,
  about: z.string().trim().max(2000, 'At most 2000 characters.'),
  version,
});

const allRoles = [...new Set<Role>([...buyerRoles, ...fabricatorRoles])];
const roles = z
  .array(z.enum(allRoles, 'This role does not exist.'))
  .min(1, 'Choose at least one role.')
  .max(8);

export const inviteForm = z.object({ email: emailField, roles });
export const withdrawInvitationForm = z.object({ invitationId: id, version });
export const changeRolesForm = z.object({ membershipId: id, roles, version });
export const removeMemberForm = z.object({ membershipId: id, version });

/** Empty means no limit: nobody needs a second person. */
export const approvalLimitForm = z.object({
  approvalLimit: z
    .string()
    .trim()
    .transform((text, context) => {
      if (text === '') return null;
      const amount = parseAmount(text);
      if (amount === undefined) {
        context.addIssue({
          code: 'custom',
          message: 'Enter an amount such as 5000.00, or nothing for no limit.',
        });
        return z.NEVER;
      }
      if (amount > 10_000_000_000) {
        context.addIssue({ code: 'custom', message: 'A limit may be 100 million at most.' });
        return z.NEVER;
      }
      return amount;
    }),
  version,
});

const addressFields = {
  purpose: z.enum(addressPurposes, 'Choose what the address is for.'),
  name: line(120).min(1, 'Enter the name on the address.'),
  line1: line(120).min(1, 'Enter street and number.'),
  line2: line(120),
  postalCode: line(20),
  city: line(80).min(1, 'Enter the town.'),
  region: line(80),
  country: z.string().refine(isCountryCode, 'Choose a country.'),
};
export const addAddressForm = z.object(addressFields);
export const updateAddressForm = z.object({ ...addressFields, addressId: id, version });
export const archiveAddressForm = z.object({ addressId: id, version });
