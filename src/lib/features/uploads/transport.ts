import type {
  UploadFinish,
  UploadPartSlots,
  UploadSlot,
  UploadStart,
  UploadState,
} from '../../schemas/api/files.ts';

/** Something went wrong on the way; the words are for the person. */
export class UploadProblem extends Error {
  /** Trying again without change may help. */
  readonly again: boolean;
  readonly missing: number[];

  constructor(message: string, options: { again: boolean; missing?: number[] }) {
    super(message);
    this.again = options.again;
    this.missing = options.missing ?? [];
  }
}

const noAnswer = 'The connection was lost. Nothing is lost: it can go on from where it stopped.';

interface Problem {
  detail?: unknown;
  fields?: Record<string, unknown>;
  data?: { missing?: unknown } | null;
}

function problemOf(status: number, body: Problem): UploadProblem {
  const words = body.fields?.['file'] ?? body.detail;
  const missing = body.data?.missing;
  return new UploadProblem(
    typeof words === 'string' && words !== '' ? words : 'The server did not take the file.',
    {
      again: status >= 500 || status === 409 || status === 429,
      ...(Array.isArray(missing) ? { missing: missing.filter((n) => typeof n === 'number') } : {}),
    },
  );
}

async function ask<T>(path: string, init: RequestInit): Promise<T> {
  let answer: Response;
  try {
    answer = await fetch(path, init);
  } catch {
    if (init.signal?.aborted) throw new DOMException('cancelled', 'AbortError');
    throw new UploadProblem(noAnswer, { again: true });
  }
  if (answer.status === 204) return undefined as T;
  const body: unknown = await answer.json().catch(() => ({}));
  if (!answer.ok) throw problemOf(answer.status, (body ?? {}) as Problem);
  return body as T;
}

const post = (body: unknown, signal?: AbortSignal): RequestInit => ({
  method: 'POST',
  headers: { 'content-type': 'application/json' },
  body: JSON.stringify(body),
  ...(signal ? { signal } : {}),
});

export const uploadApi = {
  start: (input: UploadStart, signal: AbortSignal) => ask<UploadSlot>('/api/v1/uploads', post(input, signal)),
  parts: (fileId: string, numbers: number[], signal: AbortSignal) =>
    ask<UploadPartSlots>(`/api/v1/uploads/${fileId}/parts`, post({ numbers }, signal)),
  finish: (fileId: string, input: UploadFinish, signal: AbortSignal) =>
    ask<UploadState>(`/api/v1/uploads/${fileId}/finish`, post(input, signal)),
  state: (fileId: string) => ask<UploadState>(`/api/v1/uploads/${fileId}`, {}),
  cancel: (fileId: string) => ask<void>(`/api/v1/uploads/${fileId}`, { method: 'DELETE' }),
};

/** Sends bytes to a signed slot; tells how many went out, and gives the ETag of the store. */
export function sendBytes(
  slot: { url: string; headers: Record<string, string> },
  bytes: Blob,
  options: { onProgress: (sent: number) => void; signal: AbortSignal },
): Promise<string | null> {
  return new Promise((resolve, reject) => {
    const request = new XMLHttpRequest();
    request.open('PUT', slot.url);
    for (const [name, value] of Object.entries(slot.headers)) request.setRequestHeader(name, value);
    const cancel = () => request.abort();
    const done = (end: () => void) => {
      options.signal.removeEventListener('abort', cancel);
      end();
    };
    request.upload.onprogress = (event) => options.onProgress(event.loaded);
    request.onload = () =>
      done(() =>
        request.status >= 200 && request.status < 300
          ? resolve(request.getResponseHeader('etag'))
          : reject(
              new UploadProblem('The file store did not take the file. Please try again.', { again: true }),
            ),
      );
    request.onerror = () => done(() => reject(new UploadProblem(noAnswer, { again: true })));
    request.onabort = () => done(() => reject(new DOMException('cancelled', 'AbortError')));
    if (options.signal.aborted) {
      reject(new DOMException('cancelled', 'AbortError'));
      return;
    }
    options.signal.addEventListener('abort', cancel);
    request.send(bytes);
  });
}
