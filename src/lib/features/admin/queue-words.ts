import type { JobState, MailState } from '../../domain/delivery.ts';
import type { StateKind } from '../../ui/state-kind.ts';

export const mailStateText: Record<MailState, string> = {
  queued: 'Queued',
  sending: 'Being sent',
  sent: 'Sent',
  dead: 'Given up',
  parked: 'Parked',
};
export const mailStateKind: Record<MailState, StateKind> = {
  queued: 'waiting',
  sending: 'waiting',
  sent: 'ok',
  dead: 'blocker',
  parked: 'neutral',
};

export const jobStateText: Record<JobState, string> = {
  queued: 'Queued',
  running: 'Running',
  done: 'Done',
  dead: 'Given up',
  cancelled: 'Cancelled',
  parked: 'Parked',
};
export const jobStateKind: Record<JobState, StateKind> = {
  queued: 'waiting',
  running: 'waiting',
  done: 'ok',
  dead: 'blocker',
  cancelled: 'neutral',
  parked: 'neutral',
};

export const handEventText = { retry: 'Try again', park: 'Park' } as const;

export const serviceText: Record<string, string> = {
  payments: 'Payment service',
  storage: 'Object store',
  mail: 'Mail server',
};
