import type { JobDefinition } from '../jobs/index.ts';

/** Every kind of background job. A domain adds its definition here; the handler loads when first run. */
export const jobDefinitions: readonly JobDefinition<never>[] = [];
