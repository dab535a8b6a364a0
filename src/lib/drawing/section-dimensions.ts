/** The measures of a section: lengths above it, diameters beside it, leads below. */
import { horizontalDimension, verticalDimension } from './dimension.ts';
import { lengthText } from './measures.ts';
import type { Point, Primitive } from './model.ts';
import { crossing, partEnds, type SectionInput } from './section-geometry.ts';
import type { SectionLeads } from './section-leads.ts';

/** The first and last cut above the axis, and all between. */
function cutsAbove(input: SectionInput): { tops: Point[]; first: Point; last: Point } {
  const tops = Array.from({ length: Math.floor(input.winding.turns + 0.5) }, (_, i) =>
    crossing(input, i + 0.5),
  );
  const first = tops[0] ?? crossing(input, 0);
  return { tops, first, last: tops[tops.length - 1] ?? first };
}

const labelled =
  ({ textHeight, lettering }: SectionInput) =>
  (mm: number, prefix = '') => ({
    label: lengthText(mm, lettering, prefix),
    height: textHeight,
  });

/** Pitch, length over the copper, heated length, part: one above the other. */
function lengths(input: SectionInput, highest: number): Primitive[] {
  const { winding, tube, part, faceGap, textHeight: t } = input;
  const label = labelled(input);
  const { tops, first, last } = cutsAbove(input);
  const rows: [number, number, number, number, { label: string; height: number }][] = [];
  const second = tops[1];
  if (second && faceGap === null)
    rows.push([first[0], second[0], first[1], second[1], label(second[0] - first[0])]);
  if (faceGap === null && !winding.turnsAssumed && winding.turns > 1) {
    const [a, b] = [first[0] - tube.width / 2, last[0] + tube.width / 2];
    rows.push([a, b, first[1], last[1], label(b - a)]);
  }
  const ends = partEnds(input);
  if (part && ends) {
    const top = part.outside / 2;
    if (part.heated) {
      const middle = (ends.left + ends.right) / 2;
      rows.push([
        middle - part.heated / 2,
        middle + part.heated / 2,
        top,
        top,
        label(part.heated, 'heated '),
      ]);
    }
    rows.push([ends.left, ends.right, top, top, label(part.length)]);
  }
  return rows.flatMap(([a, b, fromA, fromB, words], i) =>
    horizontalDimension(a, b, highest + (i + 1) * t * 2.3, fromA, fromB, words),
  );
}

/** The opening on the left, the part and a different last opening on the right. */
function diameters(input: SectionInput, left: number, right: number): Primitive[] {
  const { winding, tube, part, faceGap, textHeight: t, openingPrefix, inside } = input;
  const label = labelled(input);
  const { first, last } = cutsAbove(input);
  const step = t * 2.3;
  const found: Primitive[] = [];
  const across = (edge: number, at: number, from: number, prefix: string) => {
    if (edge > 0) found.push(...verticalDimension(-edge, edge, at, from, from, label(2 * edge, prefix)));
  };
  const clear = winding.radiusAt(0.5) - tube.height / 2;
  across(inside ? clear + tube.height : clear, left - step, first[0] - tube.width / 2, openingPrefix);
  const ends = partEnds(input);
  if (part && ends) across(part.outside / 2, right + step, ends.right, 'Ø ');
  const farClear = winding.radiusAt(winding.turns) - tube.height / 2;
  if (faceGap === null && Math.abs(farClear - clear) > 0.05) {
    across(farClear, right + (part ? 2 : 1) * step, last[0], openingPrefix);
  }
  return found;
}

function leadDimensions(input: SectionInput, leads: SectionLeads, right: number): Primitive[] {
  const { winding, tube, faceGap, leadExit, textHeight: t, lettering } = input;
  const label = (mm: number) => ({ label: lengthText(mm, lettering), height: t });
  const [one, other] = leads.ends;
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

export function sectionDimensions(input: SectionInput, leads: SectionLeads): Primitive[] {
  const { winding, tube, part, faceGap, textHeight: t, inside } = input;
  const { tops, first, last } = cutsAbove(input);
  const ends = partEnds(input) ?? { left: first[0], right: last[0] };
  const highest = Math.max(
    ...tops.map((top) => top[1] + tube.height / 2),
    inside && part ? part.outside / 2 : 0,
  );
  const left = Math.min(crossing(input, 0)[0] - tube.width / 2, ends.left);
  const right = Math.max(crossing(input, winding.turns)[0] + tube.width / 2, ends.right);
  const found = [...lengths(input, highest), ...diameters(input, left, right)];
  if (faceGap !== null && part) {
    const y = -Math.max(highest, part.outside / 2) - t * 2.2;
    const [a, b] = [tube.width / 2, tube.width / 2 + faceGap];
    found.push(...horizontalDimension(a, b, y, -highest, -part.outside / 2, labelled(input)(faceGap)));
  }
  if (input.leads.given) found.push(...leadDimensions(input, leads, right));
  return found;
}
