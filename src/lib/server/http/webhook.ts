import { json, type RequestEvent } from '@sveltejs/kit';
import { AppError } from '../../domain/errors.ts';
import { log } from '../log/index.ts';

/** Events are a few kilobytes; anything far above is not one. */
const limitBytes = 512_000;

/**
 * Wraps a webhook: the raw body as it came goes to the receiver. 200 once it is stored, 400 for what is
 * forged or broken, 500 when it could not be stored, so that the service sends it again.
 */
export function webhook(receive: (rawBody: Buffer, signature: string | null) => Promise<void>) {
  return async ({ request, locals }: Pick<RequestEvent, 'request' | 'locals'>): Promise<Response> => {
    const { requestId } = locals;
    try {
      const body = Buffer.from(await request.arrayBuffer());
      if (body.byteLength > limitBytes) return json({ error: 'too large', requestId }, { status: 413 });
      await receive(body, request.headers.get('stripe-signature'));
      return json({ received: true });
    } catch (problem) {
      if (problem instanceof AppError) {
        log().warn({ requestId, code: problem.code }, 'webhook refused');
        return json({ error: problem.code, requestId }, { status: 400 });
      }
      log().error(
        { requestId, error: problem instanceof Error ? problem.message : String(problem) },
        'webhook not stored',
      );
      return json({ error: 'not stored', requestId }, { status: 500 });
    }
  };
}
