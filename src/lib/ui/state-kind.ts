/** How things stand, told by a shape and a word; the colour only repeats it. */
export type StateKind = 'ok' | 'caution' | 'blocker' | 'neutral' | 'waiting';

export const stateText: Record<StateKind, string> = {
  ok: 'text-verdigris',
  caution: 'text-amber',
  blocker: 'text-oxide',
  neutral: 'text-graphite-soft',
  waiting: 'text-graphite',
};

export const stateWash: Record<StateKind, string> = {
  ok: 'bg-verdigris-wash',
  caution: 'bg-amber-wash',
  blocker: 'bg-oxide-wash',
  neutral: 'bg-well',
  waiting: 'bg-well',
};
