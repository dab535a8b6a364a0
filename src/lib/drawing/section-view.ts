/** The section through the axis: cut tubes, the half turns behind, the part, leads, water, dimensions. */
import { horizontalDimension, verticalDimension } from './dimension.ts';
import {
  lengthText,
  type DrawnLeads,
  type DrawnPart,
  type DrawnTube,
  type DrawnWinding,
  type Lettering,
} from './measures.ts';
import type { DrawingView, Point, Primitive } from './model.ts';
import { arrowHead, boundsOf, circle, line, rectangle, text, tubeAlong } from './primitives.ts';
import { tubeSection } from './tube-section.ts';

export interface SectionInput {
  winding: DrawnWinding;
  tube: DrawnTube;
  part: DrawnPart | null;
  leads: DrawnLeads;
  leadExit: 'axial' | 'radial' | 'tangential' | null;
  direction: 'right' | 'left' | null;
  centreTap: boolean;
  /** Axial distance from the copper to the part's face, for a flat coil in front of its part. */
  faceGap: number | null;
  /** The coil lies inside the part. */
  inside: boolean;
  fixtureParts: { name: string; r: number; z: number; size: number }[];
  title: string;
  textHeight: number;
  lettering: Lettering;
  /** Word for the clear opening: a diameter, or the width of a racetrack. */
  openingPrefix: string;
}

/** Where the centre line crosses the section plane after n turns; it starts below the axis. */
function crossing({ winding }: SectionInput, n: number): Point {
  const x = (n - winding.turns / 2) * winding.pitch;
  return [x, -winding.radiusAt(n) * Math.cos(2 * Math.PI * n)];
}

function halfTurnsBehind(input: SectionInput): Primitive[] {
  const { winding, tube, direction } = input;
  const kind = winding.turnsAssumed ? 'open' : 'behind';
  const first = direction === 'left' ? 0 : 0.5;
  const found: Primitive[] = [];
  for (let n = first; n < winding.turns - 1e-9; n += 1) {
    const end = Math.min(n + 0.5, winding.turns);
    const path = Array.from({ length: 13 }, (_, i) => crossing(input, n + ((end - n) * i) / 12));
    found.push(...tubeAlong(kind, path, tube.width));
  }
  return found;
}

function partInSection({ part, faceGap, tube }: SectionInput): Primitive[] {
  if (!part) return [];
  const left = faceGap === null ? part.offset - part.length / 2 : tube.width / 2 + faceGap;
  const radius = part.outside / 2;
  const hole = part.inside / 2;
  const found: Primitive[] =
    hole > 0
      ? [
          rectangle('part', left, -radius, part.length, 2 * radius, 'void'),
          rectangle('part', left, hole, part.length, radius - hole, 'hatch'),
          rectangle('part', left, -radius, part.length, radius - hole, 'hatch'),
        ]
      : [rectangle('part', left, -radius, part.length, 2 * radius, 'hatch')];
  if (part.heated) {
    // Thick chain line beside the surface that must get hot (common practice on drawings of treated parts).
    const middle = left + part.length / 2;
    const off = radius * 0.06 + 0.4;
    for (const y of [radius - off, -radius + off]) {
      found.push(line('heated', middle - part.heated / 2, y, middle + part.heated / 2, y));
    }
  }
  return found;
}

/** The two leads as tubes, with arrows for the water and the face they end on. */
function leadsInSection(input: SectionInput): {
  primitives: Primitive[];
  face: { x: number; y: number };
  ends: Point[];
} {
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
  return { primitives, face: { x: ends[0][0], y: ends[0][1] }, ends };
}

function sectionDimensions(input: SectionInput, leads: ReturnType<typeof leadsInSection>): Primitive[] {
  const { winding, tube, part, faceGap, textHeight: t, lettering, openingPrefix, inside } = input;
  const label = (mm: number, prefix = '') => ({ label: lengthText(mm, lettering, prefix), height: t });
  const found: Primitive[] = [];
  const tops = Array.from({ length: Math.floor(winding.turns + 0.5) }, (_, i) => crossing(input, i + 0.5));
  const first = tops[0] ?? crossing(input, 0);
  const last = tops[tops.length - 1] ?? first;
  const partLeft = part
    ? faceGap === null
      ? part.offset - part.length / 2
      : tube.width / 2 + faceGap
    : first[0];
  const partRight = part ? partLeft + part.length : last[0];
  const highest = Math.max(
    ...tops.map((top) => top[1] + tube.height / 2),
    inside && part ? part.outside / 2 : 0,
  );
  const left = Math.min(crossing(input, 0)[0] - tube.width / 2, partLeft);
  const right = Math.max(crossing(input, winding.turns)[0] + tube.width / 2, partRight);
  const step = t * 2.3;

  let level = highest + step;
  const second = tops[1];
  if (second && faceGap === null) {
    found.push(
      ...horizontalDimension(first[0], second[0], level, first[1], second[1], label(second[0] - first[0])),
    );
    level += step;
  }
  if (faceGap === null && !winding.turnsAssumed && winding.turns > 1) {
    const [a, b] = [first[0] - tube.width / 2, last[0] + tube.width / 2];
    found.push(...horizontalDimension(a, b, level, first[1], last[1], label(b - a)));
    level += step;
  }
  if (part) {
    if (part.heated) {
      const middle = partLeft + part.length / 2;
      found.push(
        ...horizontalDimension(
          middle - part.heated / 2,
          middle + part.heated / 2,
          level,
          part.outside / 2,
          part.outside / 2,
          {
            label: `heated ${lengthText(part.heated, lettering)}`,
            height: t,
          },
        ),
      );
      level += step;
    }
    found.push(
      ...horizontalDimension(
        partLeft,
        partRight,
        level,
        part.outside / 2,
        part.outside / 2,
        label(part.length),
      ),
    );
    found.push(
      ...verticalDimension(
        -part.outside / 2,
        part.outside / 2,
        right + step,
        partRight,
        partRight,
        label(part.outside, 'Ø '),
      ),
    );
  }
  const clear = winding.radiusAt(0.5) - tube.height / 2;
  const edge = inside ? winding.radiusAt(0.5) + tube.height / 2 : clear;
  if (edge > 0) {
    found.push(
      ...verticalDimension(
        -edge,
        edge,
        left - step,
        first[0] - tube.width / 2,
        first[0],
        label(2 * edge, openingPrefix),
      ),
    );
  }
  const farEdge = winding.radiusAt(winding.turns) - tube.height / 2;
  if (faceGap === null && Math.abs(farEdge - clear) > 0.05 && farEdge > 0) {
    found.push(
      ...verticalDimension(
        -farEdge,
        farEdge,
        right + (part ? 2 : 1) * step,
        last[0],
        last[0],
        label(2 * farEdge, openingPrefix),
      ),
    );
  }
  if (faceGap !== null && part) {
    const y = -Math.max(highest, part.outside / 2) - t * 2.2;
    found.push(
      ...horizontalDimension(
        tube.width / 2,
        tube.width / 2 + faceGap,
        y,
        -highest,
        -part.outside / 2,
        label(faceGap),
      ),
    );
  }
  if (input.leads.given) found.push(...leadDimensions(input, leads, Math.max(right, partRight)));
  return found;
}

function leadDimensions(
  input: SectionInput,
  leads: ReturnType<typeof leadsInSection>,
  right: number,
): Primitive[] {
  const { winding, tube, faceGap, leadExit, textHeight: t, lettering } = input;
  const label = (mm: number) => ({ label: lengthText(mm, lettering), height: t });
  const [one, other] = leads.ends as [Point, Point];
  const low =
    Math.min(crossing(input, 0)[1], crossing(input, Math.floor(winding.turns))[1]) - tube.height / 2;
  if (faceGap !== null || leadExit === 'axial') {
    const start = Math.min(crossing(input, 0)[0], crossing(input, winding.turns)[0]) - tube.width / 2;
    const level = Math.min(one[1], other[1]) - tube.height / 2 - t * 2.6;
    const length = horizontalDimension(one[0], start, level, other[1], low, label(start - one[0]));
    const apart = verticalDimension(
      one[1],
      other[1],
      one[0] - t * 11,
      one[0],
      one[0],
      label(Math.abs(one[1] - other[1])),
    );
    return faceGap !== null ? length : [...length, ...apart];
  }
  const level = one[1] - t * 5.6;
  return [
    ...horizontalDimension(one[0], other[0], level, one[1], other[1], label(other[0] - one[0])),
    ...verticalDimension(
      low,
      one[1],
      right + t * 1.2,
      crossing(input, winding.turns)[0] + tube.width / 2,
      other[0] + tube.width / 2,
      label(low - one[1]),
    ),
  ];
}

export function sectionView(input: SectionInput): DrawingView {
  const { winding, tube, textHeight: t, centreTap } = input;
  const primitives: Primitive[] = [...halfTurnsBehind(input), ...partInSection(input)];
  const leads = leadsInSection(input);
  primitives.push(...leads.primitives);
  for (let n = 0; n <= winding.turns + 1e-9; n += 0.5) {
    const [x, y] = crossing(input, n);
    primitives.push(...tubeSection(x, y, tube, winding.turnsAssumed));
  }
  if (centreTap) {
    const [x, y] = crossing(input, winding.turns / 2);
    const side = y >= 0 ? 1 : -1;
    const tip = y + side * (tube.height / 2 + t * 2);
    primitives.push(
      line('lead', x, y + (side * tube.height) / 2, x, tip),
      circle('lead', x, tip, t * 0.3, 'solid'),
      text('lead', x + t * 0.6, tip - t * 0.35, 'centre tap', 'start'),
    );
  }
  for (const metal of input.fixtureParts) {
    primitives.push(
      circle('fixture', metal.z, metal.r, metal.size / 2, 'hatch'),
      text('fixture', metal.z, metal.r + metal.size / 2 + t * 0.4, metal.name),
    );
  }
  const core = boundsOf(
    primitives.filter((p) => p.type !== 'text' && p.kind !== 'water'),
    t,
    0,
  );
  primitives.push(line('centre', core.x - t * 0.8, 0, core.x + core.width + t * 0.8, 0));
  primitives.push(...sectionDimensions(input, leads));
  return { id: 'section', title: input.title, primitives, bounds: boundsOf(primitives, t, t * 1.2) };
}
