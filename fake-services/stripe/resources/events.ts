/** Events, and where they are sent: v1 webhook endpoints and v2 event destinations. */
import type { Stripe } from 'stripe';
import { z } from 'zod';
import { invalidParam, missing, missingV2 } from '../core/errors.ts';
import { inRange, listPage, listPageV2 } from '../core/listing.ts';
import { bool, expand, mergeMetadata, metadata, page, range, text, url } from '../core/params.ts';
import type { EndpointRecord } from '../core/records.ts';
import { route } from '../core/router.ts';
import { destinationRoutes } from './event-destinations.ts';
import { API_VERSION, type PaymentService } from '../core/service.ts';

/** The service keeps events for thirty days. */
const RETENTION = 30 * 86_400;

function findEndpoint(service: PaymentService, id: string): EndpointRecord {
  const record = service.store.tables.endpoints.get(id);
  if (record === undefined) throw missing('webhook endpoint', id, 'webhook_endpoint');
  return record;
}

const endpointFields = {
  description: z.string().max(5000).optional(),
  metadata: metadata(),
  expand: expand(),
};

const endpointRoutes = [
  route(
    'POST',
    '/v1/webhook_endpoints',
    z.strictObject({
      ...endpointFields,
      enabled_events: z.array(text()).min(1),
      url: url(),
      api_version: text().optional(),
      connect: bool().optional(),
    }),
    (service, params) => {
      if (params.api_version !== undefined && params.api_version !== API_VERSION) {
        throw invalidParam(undefined, `This stand-in renders events of ${API_VERSION} only.`, 'api_version');
      }
      const id = service.store.id('we');
      const secret = service.store.id('whsec', 32);
      const object = {
        id,
        object: 'webhook_endpoint',
        api_version: API_VERSION,
        application: null,
        created: service.now(),
        description: params.description ?? null,
        enabled_events: params.enabled_events,
        livemode: false,
        metadata: mergeMetadata({}, params.metadata),
        status: 'enabled',
        url: params.url,
      } satisfies Stripe.WebhookEndpoint;
      service.store.tables.endpoints.put(id, { object, secret });
      // The secret is told once.
      return { ...object, secret };
    },
  ),
  route(
    'GET',
    '/v1/webhook_endpoints/:id',
    z.strictObject({ expand: expand() }),
    (service, _params, id) => findEndpoint(service, id).object,
  ),
  route(
    'POST',
    '/v1/webhook_endpoints/:id',
    z.strictObject({
      ...endpointFields,
      enabled_events: z.array(text()).min(1).optional(),
      url: url().optional(),
      disabled: bool().optional(),
    }),
    (service, params, id) => {
      const record = findEndpoint(service, id);
      const { object } = record;
      object.metadata = mergeMetadata(object.metadata, params.metadata);
      if (params.description !== undefined) object.description = params.description;
      if (params.enabled_events !== undefined) object.enabled_events = params.enabled_events;
      if (params.url !== undefined) object.url = params.url;
      if (params.disabled !== undefined) object.status = params.disabled ? 'disabled' : 'enabled';
      service.store.tables.endpoints.put(id, record);
      return object;
    },
  ),
  route('DELETE', '/v1/webhook_endpoints/:id', z.strictObject({}), (service, _params, id) => {
    findEndpoint(service, id);
    service.store.tables.endpoints.delete(id);
    return { id, object: 'webhook_endpoint', deleted: true } satisfies Stripe.DeletedWebhookEndpoint;
  }),
  route('GET', '/v1/webhook_endpoints', z.strictObject({ ...page }), (service, params) =>
    listPage(
      service.store.tables.endpoints.all().map((row) => row.object),
      params,
      '/v1/webhook_endpoints',
    ),
  ),
];

function pendingWebhooks(service: PaymentService, eventId: string): number {
  return service.store.tables.deliveries
    .all()
    .filter((row) => row.eventId === eventId && row.state === 'waiting').length;
}

function failedDelivery(service: PaymentService, eventId: string): boolean {
  return service.store.tables.deliveries
    .all()
    .some((row) => row.eventId === eventId && row.state !== 'delivered');
}

const eventRoutes = [
  route('GET', '/v1/events/:id', z.strictObject({ expand: expand() }), (service, _params, id) => {
    const event = service.store.tables.events.get(id);
    if (event === undefined || event.created < service.now() - RETENTION) throw missing('event', id);
    return { ...event, pending_webhooks: pendingWebhooks(service, id) };
  }),
  route(
    'GET',
    '/v1/events',
    z.strictObject({
      ...page,
      created: range(),
      type: text().optional(),
      types: z.array(text()).max(20).optional(),
      delivery_success: bool().optional(),
    }),
    (service, params) => {
      if (params.type !== undefined && params.types !== undefined) {
        throw invalidParam(
          'parameters_exclusive',
          'You may only specify one of these parameters: type, types.',
        );
      }
      const wanted = params.types ?? (params.type === undefined ? undefined : [params.type]);
      const fits = (type: string) =>
        wanted === undefined ||
        wanted.some((name) => (name.endsWith('.*') ? type.startsWith(name.slice(0, -1)) : name === type));
      return listPage(
        service.store.tables.events
          .all()
          .filter(
            (event) =>
              event.created >= service.now() - RETENTION &&
              fits(event.type) &&
              inRange(event.created, params.created) &&
              (params.delivery_success === undefined ||
                failedDelivery(service, event.id) !== params.delivery_success),
          ),
        params,
        '/v1/events',
      );
    },
  ),
];

const thinEventRoutes = [
  route('GET', '/v2/core/events/:id', z.strictObject({}), (service, _params, id) => {
    const event = service.store.tables.thinEvents.get(id);
    if (event === undefined) throw missingV2('Event', id);
    return event;
  }),
  route(
    'GET',
    '/v2/core/events',
    z.strictObject({
      limit: z.coerce.number().int().optional(),
      page: text().optional(),
      object_id: text().optional(),
      types: z.array(text()).optional(),
    }),
    (service, params) =>
      listPageV2(
        service.store.tables.thinEvents
          .all()
          .filter(
            (event) =>
              (params.object_id === undefined || event.related_object?.id === params.object_id) &&
              (params.types === undefined || params.types.includes(event.type)),
          ),
        params,
        '/v2/core/events',
      ),
  ),
];

export const eventingRoutes = [...endpointRoutes, ...eventRoutes, ...destinationRoutes, ...thinEventRoutes];
