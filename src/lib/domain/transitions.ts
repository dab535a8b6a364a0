/**
 * A state machine as a table: from which states an event leads where. The table is checked when it is
 * defined, so a misspelt or unreachable state stops the program at start, and it drives the buttons on
 * the screens too.
 */
export interface Transition<State extends string, Event extends string> {
  event: Event;
  from: readonly State[];
  to: State;
}

export interface StateMachine<State extends string, Event extends string> {
  name: string;
  initial: State;
  states: readonly State[];
  transitions: readonly Transition<State, Event>[];
}

export function defineStateMachine<const State extends string, const Event extends string>(
  machine: StateMachine<State, Event>,
): StateMachine<State, Event> {
  const known = new Set<string>(machine.states);
  for (const { event, from, to } of machine.transitions) {
    for (const state of [...from, to]) {
      if (!known.has(state)) throw new Error(`${machine.name}: ${event} names the unknown state ${state}`);
    }
  }
  if (!known.has(machine.initial)) throw new Error(`${machine.name}: unknown initial state`);
  const reached = new Set<string>([machine.initial]);
  for (let grown = true; grown;) {
    grown = false;
    for (const { from, to } of machine.transitions) {
      if (!reached.has(to) && from.some((state) => reached.has(state))) {
        reached.add(to);
        grown = true;
      }
    }
  }
  for (const state of machine.states) {
    if (!reached.has(state)) throw new Error(`${machine.name}: the state ${state} cannot be reached`);
  }
  const seen = new Set<string>();
  for (const { event, from } of machine.transitions) {
    for (const state of from) {
      const key = `${event}/${state}`;
      if (seen.has(key)) throw new Error(`${machine.name}: ${event} from ${state} is there twice`);
      seen.add(key);
    }
  }
  return machine;
}

/** Where the event leads from this state; undefined when it is not possible. */
export function nextState<State extends string, Event extends string>(
  machine: StateMachine<State, Event>,
  state: State,
  event: Event,
): State | undefined {
  return machine.transitions.find((t) => t.event === event && t.from.includes(state))?.to;
}

/** The events possible from this state, in the order of the table. */
export function eventsFrom<State extends string, Event extends string>(
  machine: StateMachine<State, Event>,
  state: State,
): Event[] {
  return machine.transitions.filter((t) => t.from.includes(state)).map((t) => t.event);
}
