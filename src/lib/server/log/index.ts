import { pino, type Logger } from 'pino';
import { config } from '../config/index.ts';

let shared: Logger | undefined;

/** Structured log of this process; secrets and personal data do not belong in it. */
export function log(): Logger {
  shared ??= pino({
    level: config().logLevel,
    base: null,
    timestamp: pino.stdTimeFunctions.isoTime,
    redact: {
      paths: ['password', 'token', 'authorization', 'cookie', '*.password', '*.token'],
      censor: '[…]',
    },
  });
  return shared;
}
