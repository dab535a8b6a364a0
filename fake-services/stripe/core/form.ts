/**
 * The form encoding of v1: `metadata[order]=7&line_items[0][quantity]=1&expand[]=charge`. Values stay text;
 * the parameter schemas turn them into numbers and booleans, as the service does.
 */
import { invalidParam } from './errors.ts';

export type FormValue = string | FormValue[] | { [key: string]: FormValue };
type FormNode = { [key: string]: FormNode | string };

const FORBIDDEN = new Set(['__proto__', 'constructor', 'prototype']);
const MAX_DEPTH = 8;

function keyPath(rawKey: string): string[] {
  const open = rawKey.indexOf('[');
  if (open < 0) return [rawKey];
  const path = [rawKey.slice(0, open)];
  const rest = rawKey.slice(open);
  if (!/^(\[[^[\]]*\])+$/.test(rest)) {
    throw invalidParam('parameter_unknown', `Invalid parameter name: ${rawKey}`, rawKey);
  }
  for (const part of rest.matchAll(/\[([^[\]]*)\]/g)) path.push(part[1] ?? '');
  return path;
}

function insert(root: FormNode, path: string[], value: string, rawKey: string): void {
  let node = root;
  path.forEach((segment, index) => {
    const name = segment === '' ? String(Object.keys(node).length) : segment;
    if (FORBIDDEN.has(name))
      throw invalidParam('parameter_unknown', `Invalid parameter name: ${rawKey}`, rawKey);
    if (index === path.length - 1) {
      node[name] = value;
      return;
    }
    const next = node[name];
    if (typeof next === 'string') throw invalidParam(undefined, `Invalid hash: ${rawKey}`, rawKey);
    const child: FormNode = next ?? Object.create(null);
    node[name] = child;
    node = child;
  });
}

function settle(node: FormNode | string): FormValue {
  if (typeof node === 'string') return node;
  const keys = Object.keys(node);
  if (keys.length > 0 && keys.every((key) => /^\d+$/.test(key))) {
    return keys
      .map(Number)
      .sort((a, b) => a - b)
      .map((key) => settle(node[String(key)] ?? ''));
  }
  return Object.fromEntries(keys.map((key) => [key, settle(node[key] ?? '')]));
}

/** Parses a query string or a form body into nested values. */
export function parseForm(text: string): Record<string, FormValue> {
  const root: FormNode = Object.create(null);
  if (text !== '') {
    for (const [rawKey, value] of new URLSearchParams(text)) {
      const path = keyPath(rawKey);
      if (path.length > MAX_DEPTH)
        throw invalidParam(undefined, `Parameter nested too deeply: ${rawKey}`, rawKey);
      insert(root, path, value, rawKey);
    }
  }
  // The root is always a hash, even when a parameter is called "0".
  return Object.fromEntries(Object.keys(root).map((key) => [key, settle(root[key] ?? '')]));
}
