/** Where thin events of v2 are sent. */
import type { Stripe } from 'stripe';
import { z } from 'zod';
import { invalidParam, missingV2 } from '../core/errors.ts';
import { listPageV2 } from '../core/listing.ts';
import { mergeMetadata, metadata, text, url } from '../core/params.ts';
import type { DestinationRecord } from '../core/records.ts';
import { route } from '../core/router.ts';
import type { PaymentService } from '../core/service.ts';

const DESTINATION_INCLUDES = ['webhook_endpoint.signing_secret', 'webhook_endpoint.url'] as const;
const destinationInclude = () => z.array(z.enum(DESTINATION_INCLUDES)).optional();

function renderDestination(
  record: DestinationRecord,
  include: readonly string[] | undefined,
): Stripe.V2.Core.EventDestination {
  const asked = new Set(include ?? []);
  return {
    ...record.object,
    webhook_endpoint: {
      ...(asked.has('webhook_endpoint.signing_secret') ? { signing_secret: record.secret } : {}),
      ...(asked.has('webhook_endpoint.url') ? { url: record.url } : {}),
    },
  };
}

function findDestination(service: PaymentService, id: string): DestinationRecord {
  const record = service.store.tables.destinations.get(id);
  if (record === undefined) throw missingV2('Event destination', id);
  return record;
}

function setStatus(
  service: PaymentService,
  id: string,
  status: 'enabled' | 'disabled',
): Stripe.V2.Core.EventDestination {
  const record = findDestination(service, id);
  record.object.status = status;
  record.object.updated = service.nowIso();
  service.store.tables.destinations.put(id, record);
  return renderDestination(record, undefined);
}

export const destinationRoutes = [
  route(
    'POST',
    '/v2/core/event_destinations',
    z.strictObject({
      enabled_events: z.array(text()).min(1),
      event_payload: z.enum(['thin', 'snapshot']),
      name: text(200),
      description: text(1000).optional(),
      type: z.enum(['webhook_endpoint', 'amazon_eventbridge', 'azure_event_grid']),
      events_from: z.array(text()).optional(),
      metadata: metadata(),
      webhook_endpoint: z.strictObject({ url: url() }).optional(),
      include: destinationInclude(),
    }),
    (service, params) => {
      if (params.type !== 'webhook_endpoint' || params.event_payload !== 'thin') {
        throw invalidParam('invalid_fields', 'This stand-in sends thin events to webhook endpoints only.');
      }
      if (params.webhook_endpoint === undefined) {
        throw invalidParam('parameter_missing', 'webhook_endpoint.url is required.', 'webhook_endpoint.url');
      }
      const id = service.store.id('ed_test');
      const object = {
        id,
        object: 'v2.core.event_destination',
        created: service.nowIso(),
        description: params.description ?? '',
        enabled_events: params.enabled_events,
        event_payload: 'thin',
        events_from: params.events_from ?? ['self'],
        livemode: false,
        metadata: mergeMetadata({}, params.metadata),
        name: params.name,
        status: 'enabled',
        type: 'webhook_endpoint',
        updated: service.nowIso(),
      } satisfies Stripe.V2.Core.EventDestination;
      const record = { object, secret: service.store.id('whsec', 32), url: params.webhook_endpoint.url };
      service.store.tables.destinations.put(id, record);
      return renderDestination(record, params.include);
    },
  ),
  route(
    'GET',
    '/v2/core/event_destinations/:id',
    z.strictObject({ include: destinationInclude() }),
    (service, params, id) =>
      renderDestination(
        findDestination(service, id),
        params.include?.filter((name) => name !== 'webhook_endpoint.signing_secret'),
      ),
  ),
  route(
    'POST',
    '/v2/core/event_destinations/:id',
    z.strictObject({
      name: text(200).optional(),
      description: text(1000).optional(),
      enabled_events: z.array(text()).min(1).optional(),
      webhook_endpoint: z.strictObject({ url: url() }).optional(),
      metadata: metadata(),
      include: destinationInclude(),
    }),
    (service, params, id) => {
      const record = findDestination(service, id);
      const { object } = record;
      if (params.name !== undefined) object.name = params.name;
      if (params.description !== undefined) object.description = params.description;
      if (params.enabled_events !== undefined) object.enabled_events = params.enabled_events;
      if (params.webhook_endpoint !== undefined) record.url = params.webhook_endpoint.url;
      object.metadata = mergeMetadata(object.metadata ?? {}, params.metadata);
      object.updated = service.nowIso();
      service.store.tables.destinations.put(id, record);
      return renderDestination(
        record,
        params.include?.filter((name) => name !== 'webhook_endpoint.signing_secret'),
      );
    },
  ),
  route('DELETE', '/v2/core/event_destinations/:id', z.strictObject({}), (service, _params, id) => {
    findDestination(service, id);
    service.store.tables.destinations.delete(id);
    return { id, object: 'v2.core.event_destination' };
  }),
  route('POST', '/v2/core/event_destinations/:id/disable', z.strictObject({}), (service, _params, id) =>
    setStatus(service, id, 'disabled'),
  ),
  route('POST', '/v2/core/event_destinations/:id/enable', z.strictObject({}), (service, _params, id) =>
    setStatus(service, id, 'enabled'),
  ),
  route('POST', '/v2/core/event_destinations/:id/ping', z.strictObject({}), (service, _params, id) => {
    findDestination(service, id);
    const event = service.emitThin('v2.core.event_destination.ping', {
      id,
      type: 'v2.core.event_destination',
      url: `/v2/core/event_destinations/${id}`,
    });
    // A ping goes to its destination whatever that has subscribed to.
    service.queue(event.id, event.type, id, true);
    return event;
  }),
  route(
    'GET',
    '/v2/core/event_destinations',
    z.strictObject({
      limit: z.coerce.number().int().optional(),
      page: text().optional(),
      include: destinationInclude(),
    }),
    (service, params) =>
      listPageV2(
        service.store.tables.destinations.all().map((row) =>
          renderDestination(
            row,
            params.include?.filter((name) => name !== 'webhook_endpoint.signing_secret'),
          ),
        ),
        params,
        '/v2/core/event_destinations',
      ),
  ),
];
