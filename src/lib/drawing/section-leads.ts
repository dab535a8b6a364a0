import type { Point, Primitive } from './model.ts';
import { arrowHead, line, text, tubeAlong } from './primitives.ts';
import { crossing, type SectionInput } from './section-geometry.ts';

/** The two leads as tubes, with arrows for the water and the face they end on. */
export interface SectionLeads {
  primitives: Primitive[];
  /** Where the two leads end: the one water enters by, then the other. */
  ends: readonly [Point, Point];
}

export function leadsInSection(input: SectionInput): SectionLeads {
  const { winding, tube, leads, leadExit, faceGap, textHeight: t } = input;
  const start = crossing(input, 0);
  const whole = Math.floor(winding.turns);
  const end: Point = crossing(input, winding.turns === whole ? winding.turns : whole);
  const kind = leads.given ? 'lead' : 'open';
  let paths: [Point[], Point[]];
  let ends: [Point, Point];
  let out: Point;
  if (faceGap !== null || leadExit === 'axial') {
    const x = Math.min(start[0], end[0]) - tube.width / 2 - leads.length;
    // Inside a part the lead from the far end comes back through the winding, else below it.
    const aside = input.inside ? leads.spacing : -leads.spacing;
    const apart = faceGap !== null ? end[1] : Math.min(start[1], end[1]) + aside;
    ends = [
      [x, start[1]],
      [x, apart],
    ];
    paths = [
      [start, ends[0]],
      [end, ...(faceGap !== null ? [] : [[end[0], apart] as Point]), ends[1]],
    ];
    out = [-1, 0];
  } else {
    const low = Math.min(start[1], end[1]) - tube.height / 2;
    const face = low - leads.length;
    const knee = low - Math.min(tube.height * 0.8, leads.length * 0.2);
    const half = leads.spacing / 2;
    const slope = Math.min(leads.length * 0.45, Math.max(0, Math.abs(start[0]) - half));
    ends = [
      [-half, face],
      [half, face],
    ];
    paths = [
      [start, [start[0], knee], [-half, knee - slope], ends[0]],
      [end, [end[0], knee], [half, knee - slope], ends[1]],
    ];
    out = [0, -1];
  }
  const primitives = [...paths.flatMap((path) => tubeAlong(kind, path, Math.min(tube.width, tube.height)))];
  const [into, away] = ends;
  const reach = t * 2.6;
  const gap = t * 0.8;
  const from: Point = [into[0] + out[0] * (reach + gap), into[1] + out[1] * (reach + gap)];
  const tip: Point = [into[0] + out[0] * gap, into[1] + out[1] * gap];
  const leaving: Point = [away[0] + out[0] * (reach + gap), away[1] + out[1] * (reach + gap)];
  primitives.push(
    line('water', from[0], from[1], tip[0], tip[1]),
    arrowHead('water', tip[0], tip[1], -out[0], -out[1], t),
    line('water', away[0] + out[0] * gap, away[1] + out[1] * gap, leaving[0], leaving[1]),
    arrowHead('water', leaving[0], leaving[1], out[0], out[1], t),
  );
  if (out[1] !== 0) {
    primitives.push(
      text('water', from[0] - t * 0.5, from[1], 'water in', 'end'),
      text('water', leaving[0] + t * 0.5, leaving[1], 'out', 'start'),
    );
  } else {
    primitives.push(
      text('water', from[0] - t * 0.5, from[1] - t * 0.4, 'water in', 'end'),
      text('water', leaving[0] - t * 0.5, leaving[1] - t * 0.4, 'out', 'end'),
    );
  }
  return { primitives, ends };
}
