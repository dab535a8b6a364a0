import type { JobDefinition } from '../jobs/index.ts';
import { heatingJob } from '../checks/index.ts';
import { asBuiltOutcomeJob } from '../orders/index.ts';
import { operationJob, paymentEventJob } from '../money/index.ts';
import { announceRequest } from './announce-request.ts';

/** The queue hands each job only a payload that its own schema has parsed, so the list may forget the types. */
function registered<Payload>(definition: JobDefinition<Payload>): JobDefinition<never> {
  return definition as unknown as JobDefinition<never>;
}

/** Every kind of background job. A domain adds its definition here; the handler loads when first run. */
export const jobDefinitions: readonly JobDefinition<never>[] = [
  registered(announceRequest),
  registered(asBuiltOutcomeJob),
  registered(heatingJob),
  registered(operationJob),
  registered(paymentEventJob),
];
