import { redirect } from '@sveltejs/kit';
import { z } from 'zod';
import { AppError } from '$lib/domain/errors.ts';
import { fileIdsForm } from '$lib/schemas/forms/order.ts';
import { readAsBuilt } from '$lib/schemas/forms/as-built.ts';
import { newId } from '$lib/server/adapters/ids.ts';
import { database } from '$lib/server/db/index.ts';
import { actorOf, formAction, loading, parseInput } from '$lib/server/http/index.ts';
import { enterRecord } from '$lib/server/orders/index.ts';
import { viewOrder } from '$lib/server/workflows/view-order.ts';
import type { Actions, PageServerLoad, RequestEvent } from './$types.ts';

async function pieceOf(event: Pick<RequestEvent, 'locals' | 'params'>) {
  const view = await viewOrder(database(), actorOf(event), event.params.id);
  const piece = view.pieces.find((row) => row.id === event.params.piece);
  if (!piece) throw new AppError('not-found');
  return { view, piece };
}

export const load: PageServerLoad = (event) =>
  loading(async () => {
    const { view, piece } = await pieceOf(event);
    const build = view.milestones.find((m) => m.kind === 'build');
    return {
      order: view.order,
      specification: view.specification,
      unitSet: view.unitSet,
      piece: { id: piece.id, kind: piece.kind, serial: piece.serial, attempt: piece.records.length + 1 },
      mayEnter: view.rights.enterRecord && view.order.state === 'running' && build?.work === 'open',
      commandId: newId(),
    };
  });

const command = z.object({ commandId: z.uuid('The form is incomplete; please reload the page.') });

export const actions: Actions = {
  default: formAction('record', async (form, event: RequestEvent) => {
    const { view, piece } = await pieceOf(event);
    const { commandId } = parseInput(command, Object.fromEntries(form));
    const read = readAsBuilt(form, view.specification.acceptance, view.unitSet);
    if (Object.keys(read.fields).length > 0) throw new AppError('invalid-input', { fields: read.fields });
    await enterRecord(database(), actorOf(event), {
      pieceId: piece.id,
      body: read.body,
      photos: parseInput(fileIdsForm, form.getAll('photos')),
      certificates: parseInput(fileIdsForm, form.getAll('certificates')),
      commandId,
    });
    redirect(303, `/orders/${event.params.id}#piece-${piece.id}`);
  }),
};
