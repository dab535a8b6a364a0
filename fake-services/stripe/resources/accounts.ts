/** Connected accounts of v2: recipients of transfers, their onboarding links and their thin events. */
import type { Stripe } from 'stripe';
import { z } from 'zod';
import { invalidParam, missingV2 } from '../core/errors.ts';
import { listPageV2 } from '../core/listing.ts';
import { email, mergeMetadata, metadata, text } from '../core/params.ts';
import type { AccountRecord } from '../core/records.ts';
import { route } from '../core/router.ts';
import type { PaymentService } from '../core/service.ts';

const INCLUDES = [
  'configuration.customer',
  'configuration.merchant',
  'configuration.recipient',
  'defaults',
  'future_requirements',
  'identity',
  'requirements',
] as const;
const include = () => z.array(z.enum(INCLUDES)).optional();
type Include = z.output<ReturnType<typeof include>>;

const requested = () => z.strictObject({ requested: z.boolean() });
const accountFields = {
  contact_email: email().optional(),
  display_name: text(200).optional(),
  dashboard: z.enum(['express', 'full', 'none']).optional(),
  configuration: z
    .strictObject({
      recipient: z
        .strictObject({
          applied: z.boolean().optional(),
          capabilities: z
            .strictObject({
              stripe_balance: z.strictObject({ stripe_transfers: requested().optional() }).optional(),
            })
            .optional(),
        })
        .optional(),
    })
    .optional(),
  defaults: z
    .strictObject({
      currency: text(3).optional(),
      locales: z.array(text(10)).optional(),
      responsibilities: z
        .strictObject({
          fees_collector: z.enum(['application', 'stripe']),
          losses_collector: z.enum(['application', 'stripe']),
        })
        .optional(),
    })
    .optional(),
  identity: z
    .strictObject({
      country: z.string().length(2).optional(),
      entity_type: z.enum(['company', 'individual', 'non_profit', 'government_entity']).optional(),
      business_details: z.strictObject({ registered_name: text(200).optional() }).optional(),
    })
    .optional(),
  include: include(),
  metadata: metadata(),
};
const createSchema = z.strictObject(accountFields);

type TransferStatus =
  Stripe.V2.Core.Account.Configuration.Recipient.Capabilities.StripeBalance.StripeTransfers;

function transfersOf(record: AccountRecord): TransferStatus | undefined {
  switch (record.transfers) {
    case 'none':
      return undefined;
    case 'active':
      return { status: 'active', status_details: [] };
    case 'requested':
      return {
        status: 'restricted',
        status_details: [{ code: 'requirements_past_due', resolution: 'provide_info' }],
      };
    case 'restricted':
      return {
        status: 'restricted',
        status_details: [{ code: 'restricted_other', resolution: 'contact_stripe' }],
      };
    case 'rejected':
      return {
        status: 'rejected',
        status_details: [{ code: 'rejected_other', resolution: 'no_resolution' }],
      };
  }
}

function requirementsOf(record: AccountRecord): Stripe.V2.Core.Account.Requirements {
  if (record.transfers !== 'requested') return { entries: [] };
  const entry = (description: string) =>
    ({
      awaiting_action_from: 'user',
      description,
      errors: [],
      impact: {
        restricts_capabilities: [
          {
            capability: 'stripe_balance.stripe_transfers',
            configuration: 'recipient',
            deadline: { status: 'currently_due' },
          },
        ],
      },
      minimum_deadline: { status: 'currently_due' },
      requested_reasons: [{ code: 'routine_onboarding' }],
    }) satisfies Stripe.V2.Core.Account.Requirements.Entry;
  return {
    entries: [
      entry('identity.business_details.registered_name'),
      entry('configuration.recipient.default_outbound_destination'),
    ],
    summary: { minimum_deadline: { status: 'currently_due' } },
  } satisfies Stripe.V2.Core.Account.Requirements;
}

/** v2 leaves parts out unless they are asked for. */
export function renderAccount(record: AccountRecord, wanted: Include): Stripe.V2.Core.Account {
  const base = record.object;
  const asked = new Set(wanted ?? []);
  const transfers = transfersOf(record);
  return {
    id: base.id,
    object: 'v2.core.account',
    applied_configurations: base.applied_configurations,
    ...(base.closed === true ? { closed: true } : {}),
    ...(base.contact_email === undefined ? {} : { contact_email: base.contact_email }),
    created: base.created,
    ...(base.dashboard === undefined ? {} : { dashboard: base.dashboard }),
    ...(base.display_name === undefined ? {} : { display_name: base.display_name }),
    livemode: false,
    metadata: base.metadata ?? {},
    ...(asked.has('configuration.recipient')
      ? {
          configuration: {
            recipient: {
              applied: base.applied_configurations.includes('recipient'),
              capabilities:
                transfers === undefined ? {} : { stripe_balance: { stripe_transfers: transfers } },
            },
          },
        }
      : {}),
    ...(asked.has('defaults') && base.defaults !== undefined ? { defaults: base.defaults } : {}),
    ...(asked.has('identity') && base.identity !== undefined ? { identity: base.identity } : {}),
    ...(asked.has('requirements') ? { requirements: requirementsOf(record) } : {}),
    ...(asked.has('future_requirements') ? { future_requirements: { entries: [] } } : {}),
  } satisfies Stripe.V2.Core.Account;
}

export function emitAccount(
  service: PaymentService,
  id: string,
  part: string,
  data?: Record<string, unknown>,
): void {
  service.emitThin(
    `v2.core.account${part}`,
    { id, type: 'v2.core.account', url: `/v2/core/accounts/${id}` },
    data,
  );
}

/** Changes whether transfers can reach the account, with the events that tell so. */
export function setTransfers(
  service: PaymentService,
  record: AccountRecord,
  state: AccountRecord['transfers'],
): void {
  if (record.transfers === state) return;
  record.transfers = state;
  const { id } = record.object;
  service.store.tables.accounts.put(id, record);
  emitAccount(service, id, '[requirements].updated');
  emitAccount(service, id, '[configuration.recipient].capability_status_updated', {
    updated_capability: 'stripe_balance.stripe_transfers',
  });
}

function wantsTransfers(params: z.output<typeof createSchema>): boolean {
  return params.configuration?.recipient?.capabilities?.stripe_balance?.stripe_transfers?.requested === true;
}

function create(service: PaymentService, params: z.output<typeof createSchema>): object {
  if (params.configuration?.recipient !== undefined && params.identity?.country === undefined) {
    throw invalidParam(
      'parameter_missing',
      'identity.country is required for the recipient configuration.',
      'identity.country',
    );
  }
  if (params.dashboard !== undefined && params.dashboard !== 'none' && params.contact_email === undefined) {
    throw invalidParam(
      'parameter_missing',
      'contact_email is required for accounts with a dashboard.',
      'contact_email',
    );
  }
  const id = service.store.id('acct', 16);
  const responsibilities = params.defaults?.responsibilities ?? {
    fees_collector: 'application',
    losses_collector: 'application',
  };
  const record: AccountRecord = {
    object: {
      id,
      object: 'v2.core.account',
      applied_configurations: params.configuration?.recipient === undefined ? [] : ['recipient'],
      ...(params.contact_email === undefined ? {} : { contact_email: params.contact_email }),
      created: service.nowIso(),
      ...(params.dashboard === undefined ? {} : { dashboard: params.dashboard }),
      ...(params.display_name === undefined ? {} : { display_name: params.display_name }),
      defaults: {
        ...(params.defaults?.currency === undefined ? {} : { currency: params.defaults.currency }),
        responsibilities: responsibilities as Stripe.V2.Core.Account.Defaults['responsibilities'],
      },
      identity: {
        ...(params.identity?.country === undefined ? {} : { country: params.identity.country.toUpperCase() }),
        ...(params.identity?.entity_type === undefined ? {} : { entity_type: params.identity.entity_type }),
      },
      livemode: false,
      metadata: mergeMetadata({}, params.metadata),
    },
    transfers: wantsTransfers(params) ? 'requested' : 'none',
    balances: {},
  };
  service.store.tables.accounts.put(id, record);
  emitAccount(service, id, '.created');
  return renderAccount(record, params.include);
}

export function findAccount(service: PaymentService, id: string): AccountRecord {
  const record = service.store.tables.accounts.get(id);
  if (record === undefined) throw missingV2('Account', id);
  return record;
}

function update(service: PaymentService, params: z.output<typeof createSchema>, id: string): object {
  const record = findAccount(service, id);
  if (record.object.closed === true) throw invalidParam('account_closed', 'This account is closed.');
  if (params.contact_email !== undefined) record.object.contact_email = params.contact_email;
  if (params.display_name !== undefined) record.object.display_name = params.display_name;
  record.object.metadata = mergeMetadata(record.object.metadata ?? {}, params.metadata);
  service.store.tables.accounts.put(id, record);
  emitAccount(service, id, '.updated');
  if (wantsTransfers(params) && record.transfers === 'none') {
    if (!record.object.applied_configurations.includes('recipient'))
      record.object.applied_configurations.push('recipient');
    setTransfers(service, record, 'requested');
  }
  return renderAccount(record, params.include);
}

export const accountRoutes = [
  route('POST', '/v2/core/accounts', createSchema, create),
  route('GET', '/v2/core/accounts/:id', z.strictObject({ include: include() }), (service, params, id) =>
    renderAccount(findAccount(service, id), params.include),
  ),
  route('POST', '/v2/core/accounts/:id', createSchema, update),
  route(
    'POST',
    '/v2/core/accounts/:id/close',
    z.strictObject({ applied_configurations: z.array(z.string()).optional() }),
    (service, _params, id) => {
      const record = findAccount(service, id);
      record.object.closed = true;
      service.store.tables.accounts.put(id, record);
      emitAccount(service, id, '.closed');
      return renderAccount(record, []);
    },
  ),
  route(
    'GET',
    '/v2/core/accounts',
    z.strictObject({
      limit: z.coerce.number().int().optional(),
      page: text().optional(),
      applied_configurations: z.array(z.string()).optional(),
      closed: z.enum(['true', 'false']).optional(),
    }),
    (service, params) =>
      listPageV2(
        service.store.tables.accounts
          .all()
          .filter((row) => (row.object.closed ?? false) === (params.closed === 'true'))
          .map((row) => renderAccount(row, [])),
        params,
        '/v2/core/accounts',
      ),
  ),
];
