import type { DrawingState } from '$lib/domain/drawing-states.ts';
import type { Tone } from '$lib/domain/milestone-states.ts';
import type { OrderState } from '$lib/domain/order-states.ts';
import type { PieceState, Verdict } from '$lib/domain/piece-states.ts';
import type { SummaryLine } from '$lib/ui/form-errors.ts';
import type { StateKind } from '$lib/ui/state-kind.ts';

export const orderStateKind: Record<OrderState, StateKind> = {
  'to-acknowledge': 'waiting',
  running: 'ok',
  suspended: 'caution',
  done: 'ok',
  ended: 'neutral',
};

export const toneKind: Record<Tone, StateKind> = {
  plain: 'neutral',
  waiting: 'waiting',
  good: 'ok',
  caution: 'caution',
  bad: 'blocker',
};

export const drawingKind: Record<DrawingState, StateKind> = {
  submitted: 'waiting',
  'changes-requested': 'caution',
  approved: 'ok',
  superseded: 'neutral',
};

export const pieceKind: Record<PieceState, StateKind> = {
  planned: 'neutral',
  measured: 'ok',
  missed: 'caution',
  accepted: 'ok',
  replaced: 'neutral',
  shipped: 'waiting',
  delivered: 'ok',
  cancelled: 'neutral',
};

export const verdictKind: Record<Verdict, StateKind> = {
  pass: 'ok',
  'pass-with-remark': 'caution',
  fail: 'blocker',
};

/** What a failed action of the order pages hands back. */
export interface Failure {
  form: string;
  code: string;
  message: string;
  fields: Record<string, string>;
  values: Record<string, string>;
}

/** The failure of a page's `form`, if there is one. */
export function failureOf(form: unknown): Failure | null {
  return form && typeof form === 'object' && 'fields' in form ? (form as Failure) : null;
}

/** The id of a control in one of several forms of a page. */
export function controlId(form: string, name: string): string {
  return `field-${form}-${name}`.replace(/[^A-Za-z0-9_-]+/g, '-');
}

/** Lines of the error summary; each links to its control. */
export function failureLines(failure: Failure | null): SummaryLine[] {
  if (!failure) return [];
  const fields = Object.entries(failure.fields);
  if (fields.length === 0) return [{ message: failure.message, href: null }];
  return fields.map(([name, message]) => ({ message, href: `#${controlId(failure.form, name)}` }));
}

/** Failure of this very form: several of one kind stand on a page, told apart by a hidden value. */
export function failureIn(
  failure: Failure | null,
  form: string,
  hidden?: { name: string; value: string },
): Failure | null {
  if (failure?.form !== form) return null;
  return hidden && failure.values[hidden.name] !== hidden.value ? null : failure;
}
