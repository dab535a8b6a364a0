/** The section through the axis: cut tubes, the half turns behind, the part, leads, water, dimensions. */
import type { DrawingView, Primitive } from './model.ts';
import { boundsOf, circle, line, rectangle, text, tubeAlong } from './primitives.ts';
import { sectionDimensions } from './section-dimensions.ts';
import { crossing, partEnds, type SectionInput } from './section-geometry.ts';
import { leadsInSection } from './section-leads.ts';
import { tubeSection } from './tube-section.ts';

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

function partInSection(input: SectionInput): Primitive[] {
  const { part } = input;
  const ends = partEnds(input);
  if (!part || !ends) return [];
  const { left } = ends;
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
