/** Windings that do not go round: racetrack, rectangle, hairpin, channel, seen from above. */
import type { Winding } from '../induction/check/types.ts';
import { horizontalDimension, verticalDimension } from './dimension.ts';
import {
  lengthText,
  millimetres,
  type DrawnLeads,
  type DrawnPart,
  type DrawnTube,
  type Lettering,
} from './measures.ts';
import type { DrawingView, Point, Primitive } from './model.ts';
import { boundsOf, circle, line, roundedOutline, text, tubeAlong } from './primitives.ts';

export interface PlanInput {
  tube: DrawnTube;
  part: DrawnPart | null;
  leads: DrawnLeads;
  textHeight: number;
  lettering: Lettering;
}

type Loop = Extract<Winding, { shape: 'racetrack' | 'rectangular-helix' | 'channel' }>;
type Hairpin = Extract<Winding, { shape: 'hairpin' }>;
type Channel = Extract<Winding, { shape: 'channel' }>;

/** Opening of a loop in millimetres, or null while it is not given. */
export function loopOpening(winding: Loop): { length: number; width: number; corner: number } | null {
  const length = millimetres(winding.insideLength);
  const width = millimetres(winding.insideWidth);
  if (!length || !width) return null;
  const corner =
    winding.shape === 'racetrack'
      ? Math.min(length, width) / 2
      : winding.shape === 'channel'
        ? 0
        : (millimetres(winding.cornerRadius) ?? 0);
  return { length, width, corner: Math.min(corner, length / 2, width / 2) };
}

export function loopPlan(
  winding: Loop,
  { tube, part, leads, textHeight: t, lettering }: PlanInput,
): DrawingView | null {
  const open = loopOpening(winding);
  if (!open) return null;
  const [overLength, overWidth] = [open.length + 2 * tube.height, open.width + 2 * tube.height];
  const kind = leads.given ? 'lead' : 'open';
  const low = -overWidth / 2;
  const primitives: Primitive[] = [
    ...[-1, 1].flatMap((side) =>
      tubeAlong(
        kind,
        [
          [(side * leads.spacing) / 2, low],
          [(side * leads.spacing) / 2, low - leads.length],
        ],
        tube.height,
      ),
    ),
    ...roundedOutline('outline', 0, 0, overLength, overWidth, open.corner + tube.height),
    ...roundedOutline('outline', 0, 0, open.length, open.width, open.corner),
    // The gap between the two ends of the winding, where the leads leave.
    line('outline', 0, low, 0, low + tube.height),
  ];
  if (part && winding.shape !== 'channel') {
    primitives.push(circle('part', 0, 0, part.outside / 2, 'hatch'));
    if (part.inside > 0) primitives.push(circle('part', 0, 0, part.inside / 2, 'void'));
  }
  primitives.push(
    line('centre', -overLength / 2 - t, 0, overLength / 2 + t, 0),
    line('centre', 0, low - t, 0, -low + t),
  );
  const top = -low + t * 2.4;
  primitives.push(
    ...horizontalDimension(-open.length / 2, open.length / 2, top, open.width / 2, open.width / 2, {
      label: lengthText(open.length, lettering),
      height: t,
    }),
    ...verticalDimension(
      -open.width / 2,
      open.width / 2,
      -overLength / 2 - t * 2.4,
      -open.length / 2,
      -open.length / 2,
      { label: lengthText(open.width, lettering), height: t },
    ),
  );
  if (open.corner > 0) {
    const at: Point = [
      open.length / 2 - open.corner * (1 - Math.SQRT1_2),
      -open.width / 2 + open.corner * (1 - Math.SQRT1_2),
    ];
    const reach = tube.height * 1.6 + t * 1.4;
    const end: Point = [at[0] + reach, at[1] - reach];
    primitives.push(
      line('dimension', at[0], at[1], end[0], end[1]),
      text(
        'dimension',
        end[0] + t * 0.3,
        end[1] - t * 0.4,
        lengthText(open.corner, lettering, 'R '),
        'start',
      ),
    );
  }
  if (leads.given) primitives.push(...leadDimensions(low, leads, tube, t, lettering));
  return { id: 'plan', title: 'Seen along the axis', primitives, bounds: boundsOf(primitives, t, t * 1.2) };
}

function leadDimensions(
  low: number,
  leads: DrawnLeads,
  tube: DrawnTube,
  t: number,
  lettering: Lettering,
): Primitive[] {
  const half = leads.spacing / 2;
  const face = low - leads.length;
  return [
    ...horizontalDimension(-half, half, face - t * 2.2, face, face, {
      label: lengthText(leads.spacing, lettering),
      height: t,
    }),
    ...verticalDimension(
      low,
      face,
      -half - tube.height / 2 - t * 2.2,
      -half - tube.height,
      -half - tube.height / 2,
      { label: lengthText(leads.length, lettering), height: t },
    ),
  ];
}

export function hairpinPlan(
  winding: Hairpin,
  { tube, leads, textHeight: t, lettering }: PlanInput,
): DrawingView | null {
  const length = millimetres(winding.length);
  const gap = millimetres(winding.legGap);
  if (!length || !gap) return null;
  const centre = gap / 2 + tube.height / 2;
  const arc = Array.from({ length: 25 }, (_, i): Point => {
    const angle = Math.PI / 2 - (Math.PI * i) / 24;
    return [length - centre + centre * Math.cos(angle), centre * Math.sin(angle)];
  });
  const kind = leads.given ? 'lead' : 'open';
  const primitives: Primitive[] = [
    ...[-1, 1].flatMap((side) =>
      tubeAlong(
        kind,
        [
          [0, side * centre],
          [Math.min(tube.height, leads.length * 0.2) * -1, side * centre],
          [-leads.length * 0.5, (side * leads.spacing) / 2],
          [-leads.length, (side * leads.spacing) / 2],
        ],
        tube.height,
      ),
    ),
    ...tubeAlong('outline', [[0, centre], ...arc, [0, -centre]], tube.height),
    line('centre', -leads.length - t, 0, length + t * 2, 0),
  ];
  const top = centre + tube.height / 2 + t * 2.4;
  primitives.push(
    ...horizontalDimension(0, length + tube.height / 2, top, centre, 0, {
      label: lengthText(length + tube.height / 2, lettering),
      height: t,
    }),
    ...verticalDimension(-gap / 2, gap / 2, length + tube.height + t * 2.4, length * 0.6, length * 0.6, {
      label: lengthText(gap, lettering),
      height: t,
    }),
  );
  if (leads.given) {
    const bottom = -Math.max(centre, leads.spacing / 2) - tube.height / 2 - t * 2.4;
    primitives.push(
      ...horizontalDimension(-leads.length, 0, bottom, -leads.spacing / 2, -centre, {
        label: lengthText(leads.length, lettering),
        height: t,
      }),
      ...verticalDimension(
        -leads.spacing / 2,
        leads.spacing / 2,
        -leads.length - t * 2.4,
        -leads.length,
        -leads.length,
        { label: lengthText(leads.spacing, lettering), height: t },
      ),
    );
  }
  return { id: 'plan', title: 'Seen from above', primitives, bounds: boundsOf(primitives, t, t * 1.2) };
}

/** A channel from its side: the legs run along the part, the crossings rise to let it pass. */
export function channelSide(
  winding: Channel,
  { tube, textHeight: t, lettering }: PlanInput,
): DrawingView | null {
  const open = loopOpening(winding);
  const height = millimetres(winding.crossingHeight);
  if (!open || !height) return null;
  const reach = open.length / 2 + tube.height / 2;
  const primitives: Primitive[] = [
    ...tubeAlong(
      'outline',
      [
        [-reach, height],
        [-reach, 0],
        [reach, 0],
        [reach, height],
      ],
      tube.width,
    ),
    circle('outline', -reach, height, tube.width / 2, 'solid'),
    circle('outline', reach, height, tube.width / 2, 'solid'),
    ...horizontalDimension(
      -open.length / 2,
      open.length / 2,
      height + tube.width / 2 + t * 2.4,
      height,
      height,
      { label: lengthText(open.length, lettering), height: t },
    ),
    ...verticalDimension(0, height, -reach - tube.width / 2 - t * 2.4, -reach, -reach, {
      label: lengthText(height, lettering),
      height: t,
    }),
  ];
  return { id: 'side', title: 'From the side', primitives, bounds: boundsOf(primitives, t, t * 1.2) };
}
