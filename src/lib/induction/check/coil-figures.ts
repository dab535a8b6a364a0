/** Figures of the coil: bare, with the part cold and hot, leads. */
import { pointOf, type CoilShift, type CoilSource } from './coil-model.ts';
import { figure, type Effect } from './figure.ts';
import type { CoilFigures, Figure, ImpedanceAnswer, LoadedFigures } from './types.ts';

/** Effects of sources on a quantity given as value·exp(shift…), for the readings of one answer. */
function effects(
  answer: ImpedanceAnswer,
  sources: readonly CoilSource[],
  reading: (l: number, rc: number, rl: number) => number,
): Effect[] {
  const p = pointOf(answer);
  const moved = (shift: CoilShift, sign: number) =>
    reading(
      p.inductance * Math.exp(sign * shift.inductance),
      p.coilResistance * Math.exp(sign * shift.coilResistance),
      p.loadResistance * Math.exp(sign * shift.loadResistance),
    );
  return sources.map(({ name, variation, shift }) => ({
    name,
    variation,
    change: (moved(shift, 1) - moved(shift, -1)) / 2,
  }));
}

export function coilFigures(
  answer: ImpedanceAnswer,
  frequency: number,
  sources: readonly CoilSource[],
): CoilFigures {
  const omega = 2 * Math.PI * frequency;
  const { method, assumptions } = answer;
  const of = (unit: Figure['unit'], reading: (l: number, rc: number, rl: number) => number): Figure => {
    const p = pointOf(answer);
    return figure(
      reading(p.inductance, p.coilResistance, p.loadResistance),
      unit,
      method,
      effects(answer, sources, reading),
      {
        assumptions,
        least: 0,
      },
    );
  };
  return {
    frequency,
    inductance: of('H', (l) => l),
    resistance: of('ohm', (_l, rc, rl) => rc + loadOf(answer, rl)),
    q: of('1', (l, rc, rl) => (omega * l) / (rc + loadOf(answer, rl))),
  };
}

/** A bare coil has no load resistance; the floor of the model must not show. */
const loadOf = (answer: ImpedanceAnswer, rl: number) => (answer.loadResistance > 0 ? rl : 0);

export function loadedFigures(
  answer: ImpedanceAnswer,
  frequency: number,
  sources: readonly CoilSource[],
): LoadedFigures {
  const omega = 2 * Math.PI * frequency;
  const { method, assumptions } = answer;
  const p = pointOf(answer);
  const of = (
    unit: Figure['unit'],
    reading: (l: number, rc: number, rl: number) => number,
    most?: number,
  ): Figure =>
    figure(
      reading(p.inductance, p.coilResistance, p.loadResistance),
      unit,
      method,
      effects(answer, sources, reading),
      {
        assumptions,
        least: 0,
        ...(most === undefined ? {} : { most }),
      },
    );
  return {
    ...coilFigures(answer, frequency, sources),
    loadResistance: of('ohm', (_l, _rc, rl) => loadOf(answer, rl)),
    efficiency: of('1', (_l, rc, rl) => loadOf(answer, rl) / (rc + loadOf(answer, rl)), 1),
    phaseDeg: of('deg', (l, rc, rl) => (Math.atan2(omega * l, rc + loadOf(answer, rl)) * 180) / Math.PI, 90),
  };
}

/** What the leads add at the contact faces, and their share of the bare inductance. */
export function leadFigures(
  withLeads: ImpedanceAnswer,
  without: ImpedanceAnswer,
): { inductance: Figure; resistance: Figure; share: number } {
  const inductance = withLeads.inductance - without.inductance;
  const resistance = Math.max(0, withLeads.resistance - without.resistance);
  const effect = (value: number, share: number, name: string): Effect[] => [
    { name, variation: { value: share, unit: '1' }, change: value * share },
  ];
  return {
    // The run of the leads near the coil and the connection is as drawn, not as built.
    inductance: figure(inductance, 'H', withLeads.method, effect(inductance, 0.15, 'run of the leads'), {
      assumptions: ['Leads straight and parallel as entered.'],
    }),
    resistance: figure(resistance, 'ohm', withLeads.method, effect(resistance, 0.15, 'run of the leads'), {
      least: 0,
    }),
    share: inductance / withLeads.inductance,
  };
}
