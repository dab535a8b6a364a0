import { error, fail, isHttpError, isRedirect, json, type RequestEvent } from '@sveltejs/kit';
import type { z } from 'zod';
import type { Actor } from '../../domain/actor.ts';
import { AppError, errorTable } from '../../domain/errors.ts';

/** Field messages of a zod error, by dotted path. The first message of a field wins. */
export function fieldMessages(problem: z.ZodError): Record<string, string> {
  const fields: Record<string, string> = {};
  for (const issue of problem.issues) {
    const path = issue.path.map(String).join('.') || 'form';
    fields[path] ??= issue.message;
  }
  return fields;
}

/** Parses what came in; field messages on failure. */
export function parseInput<T>(schema: z.ZodType<T>, input: unknown): T {
  const parsed = schema.safeParse(input);
  if (!parsed.success) throw new AppError('invalid-input', { fields: fieldMessages(parsed.error) });
  return parsed.data;
}

/** The signed-in actor, or sign-in-needed. */
export function actorOf(event: { locals: App.Locals }): Actor {
  if (!event.locals.actor) throw new AppError('sign-in-needed');
  return event.locals.actor;
}

/** For load functions: expected errors become pages with their status. */
export async function loading<T>(work: () => Promise<T>): Promise<T> {
  try {
    return await work();
  } catch (problem) {
    if (problem instanceof AppError) {
      error(problem.status, { message: problem.message, code: problem.code });
    }
    throw problem;
  }
}

export interface ActionFailure {
  code: string;
  message: string;
  fields: Record<string, string>;
  /** What was entered, so that nothing is lost (files and passwords excepted). */
  values: Record<string, string>;
  /** Which form of the page failed. */
  form: string;
  data: unknown;
}

function valuesOf(form: FormData): Record<string, string> {
  const values: Record<string, string> = {};
  for (const [name, value] of form) {
    if (typeof value !== 'string' || /password|secret|token/i.test(name)) continue;
    // A name that comes several times (boxes of one question) keeps all its values.
    values[name] = name in values ? `${values[name]},${value}` : value;
  }
  return values;
}

/** Reads a form body; a broken one (multipart too) is 400, a body above the limit 413. */
export async function readForm(event: Pick<RequestEvent, 'request'>): Promise<FormData> {
  try {
    return await event.request.formData();
  } catch (problem) {
    const status = typeof problem === 'object' && problem && 'status' in problem ? problem.status : 0;
    throw new AppError(status === 413 ? 'too-large' : 'body-unreadable', {
      ...(status === 413 ? { detail: 'Forms may be 512 kB at most; files are uploaded separately.' } : {}),
    });
  }
}

/**
 * Wraps a form action: reads the body, runs the work, and turns expected errors into a failure that
 * carries the messages by field and what was entered. Redirects pass through.
 */
export function formAction<Event extends RequestEvent, T>(
  name: string,
  work: (form: FormData, event: Event) => Promise<T>,
) {
  return async (event: Event) => {
    let form = new FormData();
    try {
      form = await readForm(event);
      return await work(form, event);
    } catch (problem) {
      if (isRedirect(problem) || isHttpError(problem)) throw problem;
      if (!(problem instanceof AppError)) throw problem;
      return fail(problem.status, {
        code: problem.code,
        message: problem.message,
        fields: problem.fields,
        values: valuesOf(form),
        form: name,
        data: problem.data ?? null,
      } satisfies ActionFailure);
    }
  };
}

export function problemJson(problem: AppError, requestId: string): Response {
  return json(
    {
      type: 'about:blank',
      title: errorTable[problem.code].message,
      status: problem.status,
      code: problem.code,
      detail: problem.message,
      fields: problem.fields,
      requestId,
      ...(problem.data === undefined ? {} : { data: problem.data }),
    },
    { status: problem.status, headers: { 'content-type': 'application/problem+json' } },
  );
}

/** Reads a JSON body up to a limit; broken JSON is 400, too much is 413. */
export async function readJson(event: Pick<RequestEvent, 'request'>, limitBytes = 256_000): Promise<unknown> {
  let text: string;
  try {
    text = await event.request.text();
  } catch (cause) {
    throw new AppError('body-unreadable', { cause });
  }
  if (text.length > limitBytes) {
    throw new AppError('too-large', { detail: `At most ${Math.round(limitBytes / 1000)} kB are taken.` });
  }
  try {
    return JSON.parse(text) as unknown;
  } catch (cause) {
    throw new AppError('body-unreadable', { detail: 'The body is not valid JSON.', cause });
  }
}

/**
 * Wraps an endpoint of /api: expected errors become `application/problem+json`. An unsafe call that
 * carries our cookie must come from our own pages (Origin), whatever its content type.
 */
export function endpoint<Event extends RequestEvent>(work: (event: Event) => Promise<Response>) {
  return async (event: Event): Promise<Response> => {
    try {
      const { request, url, locals } = event;
      const unsafe = !['GET', 'HEAD', 'OPTIONS'].includes(request.method);
      if (unsafe && locals.actor && request.headers.get('origin') !== url.origin) {
        throw new AppError('not-allowed', { detail: 'Calls with a session must come from our own pages.' });
      }
      return await work(event);
    } catch (problem) {
      if (isRedirect(problem) || isHttpError(problem)) throw problem;
      if (problem instanceof AppError) return problemJson(problem, event.locals.requestId);
      throw problem;
    }
  };
}
