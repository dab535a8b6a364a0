/**
 * Errors in the two shapes the payment service documents: v1 `{ error: { type, code, message, param } }`
 * and the same envelope for v2. `stored` tells whether the idempotency layer replays the answer: refusals
 * before an operation starts (bad parameters, wrong key, rate limits) are not stored, results are.
 */
export interface ErrorBody {
  type: string;
  code?: string;
  message: string;
  param?: string;
  decline_code?: string;
  charge?: string;
  payment_intent?: unknown;
  doc_url?: string;
}

export class ApiError extends Error {
  readonly status: number;
  readonly body: ErrorBody;
  readonly stored: boolean;
  readonly headers: Record<string, string>;

  constructor(
    status: number,
    body: ErrorBody,
    options: { stored: boolean; headers?: Record<string, string> },
  ) {
    super(body.message);
    this.name = 'ApiError';
    this.status = status;
    this.body = body;
    this.stored = options.stored;
    this.headers = options.headers ?? {};
  }
}

/** A parameter was refused before the operation started. */
export function invalidParam(code: string | undefined, message: string, param?: string): ApiError {
  return new ApiError(
    400,
    {
      type: 'invalid_request_error',
      ...(code === undefined ? {} : { code }),
      message,
      ...(param === undefined ? {} : { param }),
    },
    { stored: false },
  );
}

/** The operation started and the service refused it: the answer is kept for the idempotency key. */
export function refused(code: string | undefined, message: string, param?: string): ApiError {
  const error = invalidParam(code, message, param);
  return new ApiError(400, error.body, { stored: true });
}

export function missing(kind: string, id: string, param = 'id'): ApiError {
  return new ApiError(
    404,
    { type: 'invalid_request_error', code: 'resource_missing', message: `No such ${kind}: '${id}'`, param },
    { stored: false },
  );
}

export function unknownRoute(method: string, path: string): ApiError {
  return new ApiError(
    404,
    { type: 'invalid_request_error', message: `Unrecognized request URL (${method}: ${path}).` },
    { stored: false },
  );
}

/** v2 answers a missing object with its own code. */
export function missingV2(kind: string, id: string): ApiError {
  return new ApiError(
    404,
    { type: 'invalid_request_error', code: 'not_found', message: `${kind} not found: ${id}` },
    { stored: false },
  );
}

export function unauthenticated(message: string): ApiError {
  return new ApiError(401, { type: 'invalid_request_error', message }, { stored: false });
}

export function idempotencyMismatch(key: string): ApiError {
  return new ApiError(
    400,
    {
      type: 'idempotency_error',
      message: `Keys for idempotent requests can only be used with the same parameters they were first used with. Try using a key other than '${key}' if you meant to execute a different request.`,
    },
    { stored: false },
  );
}

export function idempotencyInUse(key: string): ApiError {
  return new ApiError(
    409,
    {
      type: 'idempotency_error',
      code: 'idempotency_key_in_use',
      message: `There is currently another in-progress request using this idempotency key (${key}).`,
    },
    { stored: false },
  );
}
