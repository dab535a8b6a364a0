import { z } from 'zod';
import { isTimeZone } from '../../domain/time-zones.ts';

/** Forms of signing in and of the own account: text as typed → what the flows take. */
export const emailField = z
  .string()
  .trim()
  .toLowerCase()
  .min(1, 'Enter an e-mail address.')
  .max(254, 'An e-mail address has 254 characters at most.')
  .pipe(z.email('Enter an e-mail address such as name@works.example.'));

export const personName = z
  .string()
  .trim()
  .min(1, 'Enter a name.')
  .max(80, 'A name has 80 characters at most.')
  .refine(
    (name) => !/[\p{Cc}\p{Cf}<>]/u.test(name),
    'A name has no control characters and no angle brackets.',
  );

export const timeZoneField = z.string().refine(isTimeZone, 'Choose a time zone of the list.');
export const checkbox = z
  .literal('on')
  .optional()
  .transform((value) => value === 'on');
/** Passwords are taken as they are typed; the rule for new ones is the server's. */
const password = (words: string) =>
  z.string().min(1, words).max(512, 'A password has 128 characters at most.');

export const signInForm = z.object({
  email: emailField,
  password: password('Enter your password.'),
  remember: checkbox,
});

export const signUpForm = z.object({
  name: personName,
  email: emailField,
  password: password('Choose a password of 12 characters or more.'),
});

export const emailForm = z.object({ email: emailField });

export const resetForm = z.object({
  token: z.string().min(1).max(200),
  password: password('Choose a password of 12 characters or more.'),
});

const code = z
  .string()
  .transform((text) => text.replace(/[\s-]/g, ''))
  .pipe(z.string().regex(/^\d{6}$/, 'Enter the six figures that your authenticator shows.'));

export const codeForm = z.object({ code });

export const secondFactorForm = z.discriminatedUnion('kind', [
  z.object({ kind: z.literal('totp'), code, trustDevice: checkbox }),
  z.object({
    kind: z.literal('backup'),
    code: z
      .string()
      .trim()
      .min(1, 'Enter one of your backup codes.')
      .max(40, 'That is longer than a backup code.'),
    trustDevice: checkbox,
  }),
]);

export const profileForm = z.object({
  name: personName,
  timeZone: timeZoneField,
  unitSet: z.enum(['metric', 'inch'], 'Choose one of the two.'),
});

export const passwordConfirmForm = z.object({ currentPassword: password('Enter your present password.') });

export const passwordChangeForm = z.object({
  currentPassword: password('Enter your present password.'),
  newPassword: password('Choose a password of 12 characters or more.'),
});

export const addressChangeForm = z.object({
  email: emailField,
  currentPassword: password('Enter your present password.'),
});
