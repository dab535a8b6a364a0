import { libraryMaterials } from '$lib/schemas/forms/materials.ts';
import { readBoardFilter } from '$lib/schemas/forms/board-filter.ts';
import { database } from '$lib/server/db/index.ts';
import { actorOf, loading } from '$lib/server/http/index.ts';
import { boardPage } from '$lib/server/search/index.ts';
import type { PageServerLoad } from './$types.ts';

export const load: PageServerLoad = (event) =>
  loading(async () => {
    const actor = actorOf(event);
    const { filter, values, errors } = readBoardFilter(event.url.searchParams, actor.unitSet);
    return {
      board: await boardPage(database(), actor, filter),
      values,
      errors,
      continued: filter.after !== undefined,
      filtered: Object.values(values).some((value) => value !== ''),
      materials: libraryMaterials.map(([value, label]) => ({ value, label })),
      unitSet: actor.unitSet,
      timeZone: actor.timeZone,
    };
  });
