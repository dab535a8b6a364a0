import type { Database, Tx } from '../db/index.ts';
import { enqueueMail } from '../outbox/index.ts';

interface Person {
  id: string;
  email: string;
}

const minutes = 60;
const ignore = 'If this was not you, do nothing: without this link nothing changes.';

/** What a token is for: better-auth gives the change of an address the same callback as a new account. */
function purposeOf(token: string): string | undefined {
  try {
    const payload: unknown = JSON.parse(Buffer.from(token.split('.')[1] ?? '', 'base64url').toString('utf8'));
    return typeof payload === 'object' && payload && 'requestType' in payload
      ? String(payload.requestType)
      : undefined;
  } catch {
    return undefined;
  }
}

export async function mailVerify(db: Database, to: Person, token: string): Promise<void> {
  const change = purposeOf(token) === 'change-email-verification';
  await enqueueMail(db, {
    kind: change ? 'verify-new-address' : 'verify-address',
    to: { userId: to.id, email: to.email },
    subject: change ? 'Confirm your new e-mail address' : 'Confirm your e-mail address',
    content: {
      heading: change ? 'Confirm your new e-mail address' : 'Confirm your e-mail address',
      paragraphs: [
        change
          ? 'Your account is to use this address from now on.'
          : 'Somebody, we think you, made an account with this address.',
        `The link works once and for ${minutes} minutes.`,
        ignore,
      ],
      action: { label: 'Confirm this address', path: `/verify?token=${encodeURIComponent(token)}` },
    },
    about: { type: 'user', id: to.id },
    secret: true,
  });
}

export async function mailReset(db: Database, to: Person, token: string): Promise<void> {
  await enqueueMail(db, {
    kind: 'reset-password',
    to: { userId: to.id, email: to.email },
    subject: 'Choose a new password',
    content: {
      heading: 'Choose a new password',
      paragraphs: [
        'A new password was asked for the account with this address.',
        `The link works once and for ${minutes} minutes. All sessions of the account end when it is used.`,
        ignore,
      ],
      action: { label: 'Choose a new password', path: `/reset?token=${encodeURIComponent(token)}` },
    },
    about: { type: 'user', id: to.id },
    secret: true,
  });
}

/** Instead of telling the person at the keyboard that the address is known. */
export async function mailAddressTaken(db: Database, to: Person): Promise<void> {
  await enqueueMail(db, {
    kind: 'sign-up-again',
    to: { userId: to.id, email: to.email },
    subject: 'You have an account already',
    content: {
      heading: 'You have an account already',
      paragraphs: [
        'Somebody, perhaps you, tried to make an account with this address. There is one already, and nothing was changed.',
        'If you do not remember the password, you can choose a new one on the sign-in page.',
      ],
      action: { label: 'Sign in', path: '/sign-in' },
    },
    about: { type: 'user', id: to.id },
  });
}

export type SecurityNotice =
  'password-changed' | 'address-change-asked' | 'address-changed' | 'two-factor-on' | 'two-factor-off';

const notices: Record<SecurityNotice, { subject: string; text: string }> = {
  'password-changed': {
    subject: 'Your password was changed',
    text: 'The password of your account was changed, and its other sessions were ended.',
  },
  'address-change-asked': {
    subject: 'A new e-mail address was entered for your account',
    text: 'Your account gets the new address once it is confirmed there. Until then this one stays.',
  },
  'address-changed': {
    subject: 'Your e-mail address was changed',
    text: 'Your account uses the new address from now on; this one is no longer written to.',
  },
  'two-factor-on': {
    subject: 'Two-factor sign-in is on',
    text: 'Signing in now asks for a code from your authenticator as well.',
  },
  'two-factor-off': {
    subject: 'Two-factor sign-in is off',
    text: 'Signing in asks for the password alone from now on.',
  },
};

/** Tells a person about a security step of their account; cannot be switched off. */
export async function mailSecurityNotice(tx: Tx, to: Person, notice: SecurityNotice): Promise<void> {
  const { subject, text } = notices[notice];
  await enqueueMail(tx, {
    kind: notice,
    to: { userId: to.id, email: to.email },
    subject,
    content: {
      heading: subject,
      paragraphs: [
        text,
        'If this was not you, choose a new password at once and tell the owners of your company.',
      ],
      action: { label: 'Open your account', path: '/account' },
    },
    about: { type: 'user', id: to.id },
  });
}
