import { countryOptions } from '$lib/domain/countries.ts';
import { can } from '$lib/domain/policy.ts';
import { roleText, rolesOf } from '$lib/domain/roles.ts';
import { timeZoneOptions } from '$lib/domain/time-zones.ts';
import {
  addAddressForm,
  approvalLimitForm,
  archiveAddressForm,
  changeRolesForm,
  inviteForm,
  removeMemberForm,
  updateAddressForm,
  updateCompanyForm,
  withdrawInvitationForm,
} from '$lib/schemas/forms/company.ts';
import { requireFreshSession } from '$lib/server/auth/index.ts';
import {
  addAddress,
  archiveAddress,
  changeRoles,
  companyPage,
  invite,
  removeMember,
  setApprovalLimit,
  updateAddress,
  updateCompany,
  withdrawInvitation,
} from '$lib/server/companies/index.ts';
import { database } from '$lib/server/db/index.ts';
import { actorOf, formAction, loading, parseInput } from '$lib/server/http/index.ts';
import { redirect } from '@sveltejs/kit';
import type { Actions, PageServerLoad } from './$types.ts';

export const load: PageServerLoad = (event) =>
  loading(async () => {
    const actor = actorOf(event);
    const companyId = event.params.id;
    const company = await companyPage(database(), actor, companyId);
    const mayEdit = can(actor, 'company.edit', { companyId });
    return {
      company,
      roles: rolesOf(company.kind).map((role) => ({ value: role, ...roleText[role] })),
      timeZone: actor.timeZone,
      mayEdit,
      mayPayouts: can(actor, 'company.payouts', { companyId }),
      mayDocuments: can(actor, 'company.documents', { companyId }),
      zones: mayEdit ? timeZoneOptions() : [],
      countries: mayEdit ? countryOptions() : [],
    };
  });

const withRoles = (form: FormData) => ({ ...Object.fromEntries(form), roles: form.getAll('roles') });

const postal = <T extends Record<string, string>>({
  name,
  line1,
  line2,
  postalCode,
  city,
  region,
  country,
}: T & {
  name: string;
  line1: string;
  line2: string;
  postalCode: string;
  city: string;
  region: string;
  country: string;
}) => ({ name, line1, line2, postalCode, city, region, country });

export const actions: Actions = {
  company: formAction('company', async (form, event) => {
    const input = parseInput(updateCompanyForm, Object.fromEntries(form));
    await updateCompany(database(), actorOf(event), { companyId: event.params['id'] ?? '', ...input });
    return { done: 'company', words: 'The company was saved.' };
  }),
  limit: formAction('limit', async (form, event) => {
    requireFreshSession(event.locals.session);
    const input = parseInput(approvalLimitForm, Object.fromEntries(form));
    await setApprovalLimit(database(), actorOf(event), { companyId: event.params['id'] ?? '', ...input });
    return {
      done: 'limit',
      words:
        input.approvalLimit === null ? 'There is no approval limit any more.' : 'The approval limit was set.',
    };
  }),
  invite: formAction('invite', async (form, event) => {
    requireFreshSession(event.locals.session);
    const input = parseInput(inviteForm, withRoles(form));
    await invite(database(), actorOf(event), { companyId: event.params['id'] ?? '', ...input });
    return { done: 'invite', words: `An invitation is on its way to ${input.email}.` };
  }),
  withdraw: formAction('withdraw', async (form, event) => {
    const input = parseInput(withdrawInvitationForm, Object.fromEntries(form));
    await withdrawInvitation(database(), actorOf(event), { companyId: event.params['id'] ?? '', ...input });
    return { done: 'withdraw', words: 'The invitation was withdrawn.' };
  }),
  roles: formAction('roles', async (form, event) => {
    requireFreshSession(event.locals.session);
    const input = parseInput(changeRolesForm, withRoles(form));
    await changeRoles(database(), actorOf(event), { companyId: event.params['id'] ?? '', ...input });
    return { done: 'roles', words: 'The roles were changed.' };
  }),
  remove: formAction('remove', async (form, event) => {
    requireFreshSession(event.locals.session);
    const actor = actorOf(event);
    const companyId = event.params['id'] ?? '';
    const input = parseInput(removeMemberForm, Object.fromEntries(form));
    await removeMember(database(), actor, { companyId, ...input });
    if (form.get('oneself') === 'yes') redirect(303, '/companies');
    return { done: 'remove', words: 'The member was taken out of the company.' };
  }),
  'add-address': formAction('add-address', async (form, event) => {
    const { purpose, ...address } = parseInput(addAddressForm, Object.fromEntries(form));
    await addAddress(database(), actorOf(event), {
      companyId: event.params['id'] ?? '',
      purpose,
      address: postal(address),
    });
    return { done: 'add-address', words: 'The address was added.' };
  }),
  'update-address': formAction('update-address', async (form, event) => {
    const { purpose, addressId, version, ...address } = parseInput(
      updateAddressForm,
      Object.fromEntries(form),
    );
    await updateAddress(database(), actorOf(event), {
      companyId: event.params['id'] ?? '',
      addressId,
      version,
      purpose,
      address: postal(address),
    });
    return { done: 'update-address', words: 'The address was saved.' };
  }),
  'archive-address': formAction('archive-address', async (form, event) => {
    const input = parseInput(archiveAddressForm, Object.fromEntries(form));
    await archiveAddress(database(), actorOf(event), { companyId: event.params['id'] ?? '', ...input });
    return { done: 'archive-address', words: 'The address was taken off the list.' };
  }),
};
