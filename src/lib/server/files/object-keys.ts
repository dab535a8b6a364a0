import { randomUUID } from 'node:crypto';

/** `company/yyyy/uuid`: random, never reused, nothing of the name or the person in it. */
export function objectKey(companyId: string, at: number): string {
  return `${companyId}/${String(new Date(at).getUTCFullYear())}/${randomUUID()}`;
}

/** Where a browser puts a file until it is verified. */
export function incomingKey(companyId: string): string {
  return `incoming/${companyId}/${randomUUID()}`;
}
