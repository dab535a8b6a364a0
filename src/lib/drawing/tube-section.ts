import type { DrawnTube } from './measures.ts';
import type { LineKind, Primitive } from './model.ts';
import { circle, polyline, roundedPoints } from './primitives.ts';

/** A tube cut across at (x, y): solid copper with its bore; dashed and empty where the turn is only assumed. */
export function tubeSection(x: number, y: number, tube: DrawnTube, assumed: boolean): Primitive[] {
  const kind: LineKind = assumed ? 'open' : 'outline';
  const bore = { width: tube.width - 2 * tube.wall, height: tube.height - 2 * tube.wall };
  const hollow = tube.wall > 0 && bore.width > 0 && bore.height > 0;
  if (tube.kind === 'round') {
    const outer = circle(kind, x, y, tube.width / 2, assumed ? 'void' : 'solid');
    return hollow ? [outer, circle(kind, x, y, bore.width / 2, 'void')] : [outer];
  }
  const outer = polyline(
    kind,
    roundedPoints(x, y, tube.width, tube.height, tube.cornerRadius),
    true,
    assumed ? 'void' : 'solid',
  );
  if (!hollow) return [outer];
  const corner = Math.max(0, tube.cornerRadius - tube.wall);
  return [outer, polyline(kind, roundedPoints(x, y, bore.width, bore.height, corner), true, 'void')];
}
