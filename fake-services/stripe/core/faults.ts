/** Trouble on order: the next matching calls of the API go wrong in one of these ways. */
import { z } from 'zod';

export const FAULT_KINDS = [
  /** 500 without any effect; v1 keeps the answer for the key. */
  'error-500',
  /** The effect happens, the answer is a 500, and v1 keeps the 500 for the key. */
  'error-500-after-effect',
  /** The connection is cut before anything happens. */
  'cut-before-effect',
  /** The effect happens and the connection is cut. */
  'cut-after-effect',
  /** No answer until the client gives up; nothing happens. */
  'hang-before-effect',
  /** The effect happens, no answer comes. */
  'hang-after-effect',
  /** The answer breaks off in the middle of its body. */
  'cut-body',
  'rate-limit-429',
  'lock-timeout-429',
  'conflict-409',
  'unavailable-503',
  /** Everything works, later. The key counts as in use meanwhile. */
  'delay',
] as const;

export const faultSchema = z.strictObject({
  kind: z.enum(FAULT_KINDS),
  /** How many calls are hit. */
  times: z.number().int().min(1).max(10_000).default(1),
  method: z.enum(['GET', 'POST', 'DELETE']).optional(),
  /** Beginning of the path, e.g. `/v1/transfers`. */
  path: z.string().optional(),
  delayMs: z.number().int().min(0).max(600_000).default(0),
});
export type Fault = z.output<typeof faultSchema>;

export class FaultList {
  private faults: Fault[] = [];

  add(fault: Fault): void {
    this.faults.push({ ...fault });
  }

  clear(): void {
    this.faults = [];
  }

  all(): Fault[] {
    return this.faults;
  }

  /** The fault for this call, used up once. */
  take(method: string, path: string): Fault | undefined {
    const fault = this.faults.find(
      (one) =>
        (one.method === undefined || one.method === method) &&
        (one.path === undefined || path.startsWith(one.path)),
    );
    if (fault === undefined) return undefined;
    fault.times -= 1;
    if (fault.times === 0) this.faults = this.faults.filter((one) => one !== fault);
    return fault;
  }
}
