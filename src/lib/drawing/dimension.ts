/** Dimension lines after common drawing-office practice: thin line, filled arrows, figure above the line. */
import type { Primitive } from './model.ts';
import { arrowHead, line, text, textLength } from './primitives.ts';

interface Span {
  /** Text above the line. */
  label: string;
  /** Height of the lettering. */
  height: number;
}

/** Between x1 and x2 on a line at `at`; extension lines start at `from1`, `from2` (y of the features). */
export function horizontalDimension(
  x1: number,
  x2: number,
  at: number,
  from1: number,
  from2: number,
  { label, height }: Span,
): Primitive[] {
  const [a, b] = x1 <= x2 ? [x1, x2] : [x2, x1];
  const [fa, fb] = x1 <= x2 ? [from1, from2] : [from2, from1];
  const over = height * 0.4 * Math.sign(at - (fa + fb) / 2 || 1);
  const head = height * 0.9;
  const parts: Primitive[] = [
    line('dimension', a, fa + Math.sign(over) * height * 0.25, a, at + over),
    line('dimension', b, fb + Math.sign(over) * height * 0.25, b, at + over),
  ];
  const labelLength = textLength(label, height);
  if (b - a >= head * 2.6) {
    parts.push(
      line('dimension', a, at, b, at),
      arrowHead('dimension', a, at, -1, 0, head),
      arrowHead('dimension', b, at, 1, 0, head),
    );
  } else {
    // Too short for arrows inside: they point in from outside.
    parts.push(
      line('dimension', a - head * 1.8, at, b + head * 1.8, at),
      arrowHead('dimension', a, at, 1, 0, head),
      arrowHead('dimension', b, at, -1, 0, head),
    );
  }
  const fits = labelLength + height * 0.8 <= b - a;
  if (fits) parts.push(text('dimension', (a + b) / 2, at + height * 0.4, label));
  else {
    parts.push(line('dimension', b, at, b + head * 1.8 + labelLength, at));
    parts.push(text('dimension', b + head * 1.8, at + height * 0.4, label, 'start'));
  }
  return parts;
}

/** Between y1 and y2 on a line at x = `at`; the figure is read from the right. */
export function verticalDimension(
  y1: number,
  y2: number,
  at: number,
  from1: number,
  from2: number,
  { label, height }: Span,
): Primitive[] {
  const [a, b] = y1 <= y2 ? [y1, y2] : [y2, y1];
  const [fa, fb] = y1 <= y2 ? [from1, from2] : [from2, from1];
  const side = Math.sign(at - (fa + fb) / 2 || 1);
  const head = height * 0.9;
  const parts: Primitive[] = [
    line('dimension', fa + side * height * 0.25, a, at + side * height * 0.4, a),
    line('dimension', fb + side * height * 0.25, b, at + side * height * 0.4, b),
  ];
  const labelLength = textLength(label, height);
  if (b - a >= head * 2.6) {
    parts.push(
      line('dimension', at, a, at, b),
      arrowHead('dimension', at, a, 0, -1, head),
      arrowHead('dimension', at, b, 0, 1, head),
    );
  } else {
    parts.push(
      line('dimension', at, a - head * 1.8, at, b + head * 1.8),
      arrowHead('dimension', at, a, 0, 1, head),
      arrowHead('dimension', at, b, 0, -1, head),
    );
  }
  if (labelLength <= b - a)
    parts.push(text('dimension', at - height * 0.4, (a + b) / 2, label, 'middle', 90));
  else {
    parts.push(line('dimension', at, b, at, b + head * 1.8 + labelLength));
    parts.push(text('dimension', at - height * 0.4, b + head * 1.8, label, 'start', 90));
  }
  return parts;
}
