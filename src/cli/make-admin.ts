import { readFileSync } from 'node:fs';
import { parseArgs } from 'node:util';
import { AppError } from '../lib/domain/errors.ts';
import {
  AdminError,
  createAuth,
  createVerifiedPerson,
  enrolSecondFactor,
  setAdmin,
} from '../lib/server/auth/index.ts';
import { config } from '../lib/server/config/index.ts';
import { closeDatabase, database } from '../lib/server/db/index.ts';

// `make-admin who@works.example`: an existing account becomes an admin.
//   --create "Name"   makes the account first; its password is read from standard input
//   --two-factor      gives it a second factor and prints what the authenticator needs
//   --revoke          takes the right back
const usage =
  'Usage: make-admin ADDRESS [--create NAME (password on standard input)] [--two-factor] [--revoke]\n';

async function main(): Promise<number> {
  const { values, positionals } = parseArgs({
    allowPositionals: true,
    options: {
      create: { type: 'string' },
      'two-factor': { type: 'boolean', default: false },
      revoke: { type: 'boolean', default: false },
    },
  });
  const [email] = positionals;
  if (!email || positionals.length !== 1) {
    process.stderr.write(usage);
    return 2;
  }
  const db = database();
  const auth = createAuth({ db, config: config() });
  if (values.create !== undefined) {
    const password = readFileSync(0, 'utf8').replace(/\r?\n$/, '');
    await createVerifiedPerson(db, auth, { name: values.create, email, password });
  }
  const { userId, twoFactor } = await setAdmin(db, email, !values.revoke);
  process.stdout.write(values.revoke ? `${email} is no longer an admin.\n` : `${email} is an admin now.\n`);
  if (values['two-factor']) {
    const { uri, secret, backupCodes } = await enrolSecondFactor(db, auth, userId);
    process.stdout.write(
      `Authenticator: ${uri}\nSecret: ${secret}\nBackup codes: ${backupCodes.join(' ')}\n`,
    );
  } else if (!values.revoke && !twoFactor && config().mode === 'production') {
    process.stdout.write(
      'Without a second factor the account has no admin rights; set it up in the account or with --two-factor.\n',
    );
  }
  return 0;
}

try {
  process.exitCode = await main();
} catch (problem) {
  const words =
    problem instanceof AppError
      ? [problem.message, ...Object.values(problem.fields)].join(' ')
      : problem instanceof Error
        ? problem.message
        : String(problem);
  process.stderr.write(`${words}\n`);
  process.exitCode = problem instanceof AdminError || problem instanceof AppError ? 2 : 1;
} finally {
  closeDatabase();
}
