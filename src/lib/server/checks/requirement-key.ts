import { createHash } from 'node:crypto';
import canonicalize from 'canonicalize';
import type { Requirement } from '../../induction/check/types.ts';

export function sha256Hex(text: string): string {
  return createHash('sha256').update(text, 'utf8').digest('hex');
}

/** Canonical JSON (RFC 8785) of a requirement and its SHA-256: equal requirements have equal keys. */
export function requirementKey(requirement: Requirement): { text: string; hash: string } {
  const text = canonicalize(requirement);
  if (text === undefined) throw new Error('a requirement is always an object');
  return { text, hash: sha256Hex(text) };
}
