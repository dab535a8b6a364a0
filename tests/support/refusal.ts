import { expect } from 'vitest';
import { AppError, type ErrorCode } from '../../src/lib/domain/errors.ts';

/** The expected error of a refused act; fails when it was let through or failed otherwise. */
export async function refusal(work: Promise<unknown>): Promise<AppError> {
  let problem: unknown;
  try {
    await work;
  } catch (caught) {
    problem = caught;
  }
  if (problem === undefined) expect.fail('the act was let through');
  if (!(problem instanceof AppError)) throw problem;
  return problem;
}

/** The code alone. */
export async function refusalCode(work: Promise<unknown>): Promise<ErrorCode> {
  return (await refusal(work)).code;
}
