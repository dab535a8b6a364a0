/** Fields to a tree of values and back, by dotted paths; numbers in a path are places in a list. */
import type { UnitSet } from '../../induction/units/dimensions.ts';
import type { FieldGroupSpec, FormOutcome, Values } from './field-spec.ts';
import { emptyValue, fieldText, readField } from './read-field.ts';

export type Tree = Record<string, unknown>;

const forbidden = new Set(['__proto__', 'prototype', 'constructor']);

function isTree(value: unknown): value is Tree {
  return typeof value === 'object' && value !== null;
}

/** Puts a value at a path, making objects and lists on the way. */
export function setAt(tree: Tree, path: string, value: unknown): void {
  const steps = path.split('.');
  if (steps.some((step) => forbidden.has(step))) return;
  let place: Tree = tree;
  steps.slice(0, -1).forEach((step, index) => {
    const next = steps[index + 1] ?? '';
    const inner = place[step];
    if (isTree(inner)) place = inner;
    else {
      const made: Tree = (/^\d+$/.test(next) ? [] : {}) as Tree;
      place[step] = made;
      place = made;
    }
  });
  place[steps.at(-1) ?? ''] = value;
}

/** The value at a path, or undefined. */
export function getAt(tree: unknown, path: string): unknown {
  let place: unknown = tree;
  for (const step of path.split('.')) {
    if (!isTree(place) || !Object.hasOwn(place, step)) return undefined;
    place = place[step];
  }
  return place;
}

export function subTree(tree: Tree, path: string): Tree {
  const value = getAt(tree, path);
  return isTree(value) ? value : {};
}

/** Reads every field of the groups into the tree; unreadable and missing ones go into the outcome. */
export function readGroups(
  groups: readonly FieldGroupSpec[],
  values: Values,
  unitSet: UnitSet,
  tree: Tree,
  outcome: FormOutcome,
): void {
  for (const field of groups.flatMap((group) => group.fields)) {
    const shown = !field.when || field.when(values);
    const typed = shown ? (values[field.path] ?? '').trim() : '';
    if (typed === '') {
      if (getAt(tree, field.path) === undefined) setAt(tree, field.path, emptyValue(field));
      if (shown && field.empty === 'required') outcome.missing.push(field.path);
      continue;
    }
    const read = readField(field, typed, unitSet);
    if (read.ok) setAt(tree, field.path, read.value);
    else outcome.errors[field.path] ??= read.message;
  }
}

/** The texts of the groups' fields for a tree of values; empty ones are left out. */
export function textsOf(
  groups: readonly FieldGroupSpec[],
  tree: Tree,
  unitSet: UnitSet,
): Record<string, string> {
  const texts: Record<string, string> = {};
  for (const field of groups.flatMap((group) => group.fields)) {
    const text = fieldText(field, getAt(tree, field.path), unitSet);
    if (text !== '') texts[field.path] = text;
  }
  return texts;
}

/** What a new form of these groups starts with. */
export function initialTexts(groups: readonly FieldGroupSpec[]): Record<string, string> {
  const texts: Record<string, string> = {};
  for (const field of groups.flatMap((group) => group.fields)) {
    if (field.initial !== undefined) texts[field.path] = field.initial;
  }
  return texts;
}
