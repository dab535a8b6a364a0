/** Small builders for the primitives of a drawing. All lengths in millimetres. */
import type { Bounds, Fill, LineKind, Point, Primitive } from './model.ts';

export function line(kind: LineKind, x1: number, y1: number, x2: number, y2: number): Primitive {
  return { type: 'line', kind, x1, y1, x2, y2 };
}

export function circle(kind: LineKind, cx: number, cy: number, r: number, fill: Fill = 'none'): Primitive {
  return { type: 'circle', kind, cx, cy, r, fill };
}

export function polyline(kind: LineKind, points: Point[], closed = false, fill: Fill = 'none'): Primitive {
  return { type: 'polyline', kind, points, closed, fill };
}

export function rectangle(
  kind: LineKind,
  x: number,
  y: number,
  width: number,
  height: number,
  fill: Fill = 'none',
): Primitive {
  return polyline(
    kind,
    [
      [x, y],
      [x + width, y],
      [x + width, y + height],
      [x, y + height],
    ],
    true,
    fill,
  );
}

export function text(
  kind: LineKind,
  x: number,
  y: number,
  words: string,
  anchor: 'start' | 'middle' | 'end' = 'middle',
  turnDeg = 0,
): Primitive {
  return { type: 'text', kind, x, y, text: words, anchor, turnDeg };
}

/** Points of a rectangle with round corners about (cx, cy), for shapes that are filled. */
export function roundedPoints(
  cx: number,
  cy: number,
  width: number,
  height: number,
  radius: number,
): Point[] {
  const r = Math.max(0, Math.min(radius, width / 2, height / 2));
  const corners: [number, number, number][] = [
    [cx + width / 2 - r, cy + height / 2 - r, 0],
    [cx - width / 2 + r, cy + height / 2 - r, 90],
    [cx - width / 2 + r, cy - height / 2 + r, 180],
    [cx + width / 2 - r, cy - height / 2 + r, 270],
  ];
  const steps = r > 0 ? 6 : 0;
  return corners.flatMap(([x, y, start]) =>
    Array.from({ length: steps + 1 }, (_, i): Point => {
      const angle = ((start + (steps ? (90 * i) / steps : 0)) * Math.PI) / 180;
      return [x + r * Math.cos(angle), y + r * Math.sin(angle)];
    }),
  );
}

/** A rectangle with round corners as true lines and arcs, so that a shop can bend or cut to it. */
export function roundedOutline(
  kind: LineKind,
  cx: number,
  cy: number,
  width: number,
  height: number,
  radius: number,
): Primitive[] {
  const r = Math.max(0, Math.min(radius, width / 2, height / 2));
  const [left, right, low, high] = [cx - width / 2, cx + width / 2, cy - height / 2, cy + height / 2];
  const sides: Primitive[] = [];
  if (right - left > 2 * r) {
    sides.push(line(kind, left + r, high, right - r, high), line(kind, left + r, low, right - r, low));
  }
  if (high - low > 2 * r) {
    sides.push(line(kind, left, low + r, left, high - r), line(kind, right, low + r, right, high - r));
  }
  if (r > 0) {
    sides.push(
      { type: 'arc', kind, cx: right - r, cy: high - r, r, startDeg: 0, endDeg: 90 },
      { type: 'arc', kind, cx: left + r, cy: high - r, r, startDeg: 90, endDeg: 180 },
      { type: 'arc', kind, cx: left + r, cy: low + r, r, startDeg: 180, endDeg: 270 },
      { type: 'arc', kind, cx: right - r, cy: low + r, r, startDeg: 270, endDeg: 360 },
    );
  }
  return sides;
}

/** A filled arrowhead with its tip at (x, y), pointing along (dx, dy). */
export function arrowHead(
  kind: LineKind,
  x: number,
  y: number,
  dx: number,
  dy: number,
  length: number,
): Primitive {
  const norm = Math.hypot(dx, dy) || 1;
  const [ux, uy] = [dx / norm, dy / norm];
  const half = length * 0.18;
  return polyline(
    kind,
    [
      [x, y],
      [x - ux * length - uy * half, y - uy * length + ux * half],
      [x - ux * length + uy * half, y - uy * length - ux * half],
    ],
    true,
    'solid',
  );
}

/** Two parallel edges at ± half a width from a path, mitred at its corners: the sides of a tube. */
export function edges(kind: LineKind, path: Point[], width: number): Primitive[] {
  const points = path.filter(
    (point, i) => i === 0 || Math.hypot(...difference(point, path[i - 1] as Point)) > 1e-9,
  );
  if (points.length < 2) return [];
  const sides: [Point[], Point[]] = [[], []];
  points.forEach((point, i) => {
    const before = unit(difference(point, points[i - 1] ?? point));
    const after = unit(difference(points[i + 1] ?? point, point));
    const [a, b] = [before ?? after, after ?? before];
    if (!a || !b) return;
    const along = unit([a[0] + b[0], a[1] + b[1]]) ?? a;
    // Half a width square to each leg; a sharp corner is cut off rather than drawn to a spike.
    const reach = width / 2 / Math.max(0.5, along[0] * a[0] + along[1] * a[1]);
    sides[0].push([point[0] - along[1] * reach, point[1] + along[0] * reach]);
    sides[1].push([point[0] + along[1] * reach, point[1] - along[0] * reach]);
  });
  return [polyline(kind, sides[0]), polyline(kind, sides[1])];
}

const difference = (to: Point, from: Point): [number, number] => [to[0] - from[0], to[1] - from[1]];

function unit([x, y]: readonly [number, number]): [number, number] | null {
  const norm = Math.hypot(x, y);
  return norm > 1e-9 ? [x / norm, y / norm] : null;
}

/** A tube seen from outside along a path, hiding what lies behind it. */
export function tubeAlong(kind: LineKind, path: Point[], width: number): Primitive[] {
  const [one, other] = edges(kind, path, width);
  if (one?.type !== 'polyline' || other?.type !== 'polyline') return [];
  return [polyline(kind, [...one.points, ...[...other.points].reverse()], true, 'void')];
}

/** Estimated length of lettering of a given height, for layout. */
export function textLength(words: string, height: number): number {
  return words.length * height * 0.66;
}

/** The box around primitives; text counts with an estimate of its width. */
export function boundsOf(primitives: readonly Primitive[], textHeight: number, margin: number): Bounds {
  let [left, low, right, high] = [Infinity, Infinity, -Infinity, -Infinity];
  const take = (x: number, y: number) => {
    left = Math.min(left, x);
    right = Math.max(right, x);
    low = Math.min(low, y);
    high = Math.max(high, y);
  };
  for (const p of primitives) {
    if (p.type === 'line') {
      take(p.x1, p.y1);
      take(p.x2, p.y2);
    } else if (p.type === 'polyline') p.points.forEach(([x, y]) => take(x, y));
    else if (p.type === 'text') {
      const length = textLength(p.text, textHeight);
      const before = p.anchor === 'start' ? 0 : p.anchor === 'middle' ? length / 2 : length;
      const angle = (p.turnDeg * Math.PI) / 180;
      const along = (at: number, up: number) =>
        take(
          p.x + at * Math.cos(angle) - up * Math.sin(angle),
          p.y + at * Math.sin(angle) + up * Math.cos(angle),
        );
      along(-before, 0);
      along(length - before, 0);
      along(-before, textHeight);
      along(length - before, textHeight);
    } else {
      take(p.cx - p.r, p.cy - p.r);
      take(p.cx + p.r, p.cy + p.r);
    }
  }
  if (left > right) return { x: 0, y: 0, width: 1, height: 1 };
  return {
    x: left - margin,
    y: low - margin,
    width: right - left + 2 * margin,
    height: high - low + 2 * margin,
  };
}
