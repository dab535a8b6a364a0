/** Every error that can be expected: one table, code → status and words for people. */
export const errorTable = {
  'not-found': { status: 404, message: 'There is nothing here, or it is not yours to see.' },
  'sign-in-needed': { status: 401, message: 'Please sign in first.' },
  'not-allowed': { status: 403, message: 'Your role in the company does not allow this.' },
  'invalid-input': { status: 400, message: 'Some of what was entered needs another look.' },
  'body-unreadable': { status: 400, message: 'What was sent could not be read.' },
  'version-conflict': {
    status: 409,
    message: 'Somebody changed this in the meantime. Here is the newer state.',
  },
  'state-conflict': { status: 409, message: 'This is no longer possible in the present state.' },
  'already-exists': { status: 409, message: 'This exists already.' },
  'too-large': { status: 413, message: 'That is larger than allowed.' },
  'type-refused': { status: 415, message: 'Files of this kind are not taken.' },
  'too-many-requests': { status: 429, message: 'That was too often in a short time. Please wait a little.' },
  'email-not-verified': {
    status: 403,
    message: 'Please confirm your e-mail address first; we have sent you a mail.',
  },
  'fresh-sign-in-needed': { status: 403, message: 'Please sign in again before this step.' },
  'two-factor-needed': {
    status: 403,
    message: 'Please set up two-factor sign-in in your account before this step.',
  },
  'wrong-sign-in': { status: 400, message: 'E-mail address and password do not fit together.' },
  'link-not-valid': { status: 400, message: 'This link was used already or has expired.' },
  'company-not-verified': { status: 403, message: 'Your company has to be verified before this step.' },
  'payout-not-ready': {
    status: 409,
    message: 'The payout account of the fabricator cannot receive money yet.',
  },
  'payment-service': {
    status: 502,
    message: 'The payment service did not answer as expected. Nothing is lost; it is tried again.',
  },
  'storage-service': { status: 502, message: 'The file store did not answer. Please try again in a moment.' },
  'limit-exceeded': { status: 422, message: 'That is beyond what one run may take.' },
  busy: { status: 503, message: 'The server is busy. Please try again in a moment.' },
} as const satisfies Record<string, { status: number; message: string }>;

export type ErrorCode = keyof typeof errorTable;

/** An expected error. `fields` holds messages by form field; `detail` adds to the table's words. */
export class AppError extends Error {
  readonly code: ErrorCode;
  readonly fields: Record<string, string>;
  readonly detail: string | undefined;
  /** The newer state on a conflict, or other data that the page needs. */
  readonly data: unknown;

  constructor(
    code: ErrorCode,
    options: { detail?: string; fields?: Record<string, string>; data?: unknown; cause?: unknown } = {},
  ) {
    super(options.detail ?? errorTable[code].message, { cause: options.cause });
    this.name = 'AppError';
    this.code = code;
    this.detail = options.detail;
    this.fields = options.fields ?? {};
    this.data = options.data;
  }

  get status(): number {
    return errorTable[this.code].status;
  }
}
