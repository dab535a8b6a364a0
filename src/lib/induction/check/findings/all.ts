import type { CheckContext } from '../context.ts';
import type { Finding } from '../types.ts';
export function findingsOf(_context: CheckContext): Finding[] {
  return [];
}
