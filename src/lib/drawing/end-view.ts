/** The view along the axis, from the lead end: the turns as a ring (or a spiral), the part, the leads. */
import { horizontalDimension } from './dimension.ts';
import {
  lengthText,
  type DrawnLeads,
  type DrawnPart,
  type DrawnTube,
  type DrawnWinding,
  type Lettering,
} from './measures.ts';
import type { DrawingView, Point, Primitive } from './model.ts';
import { boundsOf, circle, line, text, tubeAlong } from './primitives.ts';

export interface EndInput {
  winding: DrawnWinding;
  tube: DrawnTube;
  part: DrawnPart | null;
  leads: DrawnLeads;
  leadExit: 'axial' | 'radial' | 'tangential' | null;
  leadAngleDeg: number | null;
  direction: 'right' | 'left' | null;
  flat: boolean;
  /** The coil lies inside the part. */
  inside: boolean;
  textHeight: number;
  lettering: Lettering;
}

function leadPaths({ winding, tube, leads, leadExit, leadAngleDeg, flat }: EndInput): Point[][] {
  if (leadExit === 'axial' || flat) return [];
  const radius = winding.radiusAt(0.5);
  const far = radius + tube.height / 2 + leads.length;
  if (leadExit === 'tangential') {
    return [-1, 1].map((side): Point[] => [
      [side * radius, 0],
      [side * radius, -leads.length],
    ]);
  }
  const angle = leadAngleDeg !== null && Number.isFinite(leadAngleDeg) ? leadAngleDeg % 360 : 0;
  return [-angle / 2, angle / 2].map((turn): Point[] => {
    const direction = ((turn - 90) * Math.PI) / 180;
    const [ux, uy] = [Math.cos(direction), Math.sin(direction)];
    return [
      [ux * radius, uy * radius],
      [ux * far, uy * far],
    ];
  });
}

function windingAlongAxis({ winding, tube, direction, flat }: EndInput): Primitive[] {
  const kind = winding.turnsAssumed ? 'open' : 'outline';
  if (flat) {
    const sense = direction === 'left' ? -1 : 1;
    const steps = Math.ceil(winding.turns * 48);
    const path = Array.from({ length: steps + 1 }, (_, i): Point => {
      const n = (winding.turns * i) / steps;
      const angle = -Math.PI / 2 + sense * 2 * Math.PI * n;
      return [winding.radiusAt(n) * Math.cos(angle), winding.radiusAt(n) * Math.sin(angle)];
    });
    return tubeAlong(kind, path, tube.height);
  }
  // Turns of different diameter (a cone, steps) show as rings inside one another.
  const radii = Array.from({ length: Math.max(1, Math.floor(winding.turns + 0.5)) }, (_, i) =>
    winding.radiusAt(i + 0.5),
  );
  const distinct = [...new Set(radii.map((radius) => Number(radius.toFixed(2))))].sort((a, b) => b - a);
  return distinct.flatMap((radius) => [
    circle(kind, 0, 0, radius + tube.height / 2, 'void'),
    circle(kind, 0, 0, Math.max(0, radius - tube.height / 2), 'void'),
  ]);
}

export function endView(input: EndInput): DrawingView {
  const { winding, tube, part, leads, leadExit, inside, flat, textHeight: t, lettering } = input;
  const primitives: Primitive[] = [];
  const partRings = (): Primitive[] =>
    part
      ? [
          circle('part', 0, 0, part.outside / 2, 'hatch'),
          ...(part.inside > 0 ? [circle('part', 0, 0, part.inside / 2, 'void')] : []),
        ]
      : [];
  if (inside) primitives.push(...partRings());
  const kind = leads.given ? 'lead' : 'open';
  primitives.push(...leadPaths(input).flatMap((path) => tubeAlong(kind, path, tube.height)));
  if (flat && part) primitives.push(circle('behind', 0, 0, part.outside / 2));
  primitives.push(...windingAlongAxis(input));
  if (!inside && !flat) primitives.push(...partRings());
  if (leadExit === 'axial' || flat) {
    for (const n of [0, winding.turns]) {
      primitives.push(
        circle(
          'lead',
          0,
          -winding.radiusAt(n) * Math.cos(2 * Math.PI * Math.round(n)),
          tube.height * 0.3,
          'solid',
        ),
      );
    }
  }

  const outer =
    Math.max(winding.radiusAt(0.5), winding.radiusAt(Math.max(0.5, winding.turns - 0.5))) + tube.height / 2;
  const widest = Math.max(outer, part ? part.outside / 2 : 0);
  primitives.push(
    line('centre', -widest - t, 0, widest + t, 0),
    line('centre', 0, -widest - t, 0, widest + t),
  );
  primitives.push(
    ...horizontalDimension(-outer, outer, widest + t * 2.6, 0, 0, {
      label: lengthText(2 * outer, lettering, 'Ø '),
      height: t,
    }),
  );
  if (!flat && !inside && part) {
    const gap = winding.radiusAt(0.5) - tube.height / 2 - part.outside / 2;
    if (gap > 0) {
      const at = (part.outside / 2 + gap / 2) * Math.SQRT1_2;
      const out = outer * Math.SQRT1_2 + t * 1.2;
      primitives.push(
        line('dimension', at, -at, out, -out),
        circle('dimension', at, -at, t * 0.16, 'solid'),
        line('dimension', out, -out, out + t * 0.8, -out),
        text('dimension', out + t, -out - t * 0.35, `gap ${lengthText(gap, lettering)}`, 'start'),
      );
    }
  }
  return {
    id: 'end',
    title: 'Seen along the axis',
    primitives,
    bounds: boundsOf(primitives, t, t * 1.2),
  };
}
