import type { Winding } from '../induction/check/types.ts';
import { dimensionTable, shapeNames } from './dimension-table.ts';
import { endView } from './end-view.ts';
import {
  countTurns,
  drawnLeads,
  drawnPart,
  drawnTube,
  drawnWinding,
  lengthText,
  millimetres,
  soundPitch,
  type DrawingInput,
  type DrawnPart,
  type DrawnTube,
  type DrawnWinding,
  type Lettering,
} from './measures.ts';
import type { DrawingModel, DrawingView } from './model.ts';
import { channelSide, hairpinPlan, loopOpening, loopPlan, type PlanInput } from './plan-view.ts';
import type { SectionInput } from './section-geometry.ts';
import { sectionView } from './section-view.ts';

export interface DrawingOptions {
  /** Unit of the lettering; geometry stays in millimetres. */
  units?: 'metric' | 'inch';
}

/** A flat spiral: it grows by one pitch per turn and stays in its plane. */
function pancakeWinding(
  winding: Extract<Winding, { shape: 'pancake' }>,
  tube: DrawnTube,
  notes: string[],
): DrawnWinding | null {
  const inside = millimetres(winding.insideDiameter);
  if (!inside) return null;
  const pitch = soundPitch(winding.pitch, tube.height, notes);
  const counted = countTurns(winding.turns, notes);
  return {
    ...counted,
    pitch: 0,
    radiusAt: (n) => Math.max(0, inside / 2 + tube.height / 2 + pitch * (n - 0.5)),
  };
}

/** A loop seen in section across its width is drawn like a helix of that width. */
function loopWinding(winding: Winding, tube: DrawnTube, notes: string[]): DrawnWinding | null {
  if (winding.shape !== 'racetrack' && winding.shape !== 'rectangular-helix') return null;
  const open = loopOpening(winding);
  if (!open) return null;
  const radius = open.width / 2 + tube.height / 2;
  return {
    ...countTurns(winding.turns, notes),
    pitch: soundPitch(winding.pitch, tube.width, notes),
    radiusAt: () => radius,
  };
}

/** Height of the lettering: a share of the width of all views together, so that it reads the same on any. */
function lettersFor(
  winding: DrawnWinding | null,
  input: DrawingInput,
  tube: DrawnTube,
  part: DrawnPart | null,
  leadLength: number,
): number {
  const given = input.coil.winding;
  const widths: number[] = [];
  if (winding) {
    const outer = Math.max(winding.radiusAt(0.5), winding.radiusAt(winding.turns)) + tube.height / 2;
    widths.push(Math.max(winding.turns * winding.pitch + tube.width, part?.length ?? 0));
    if (!('insideLength' in given)) widths.push(2 * Math.max(outer, (part?.outside ?? 0) / 2));
    if (given.shape === 'pancake' || input.coil.handing.leadExit === 'axial') widths.push(leadLength);
  }
  if ('insideLength' in given) {
    const length = (millimetres(given.insideLength) ?? 0) + 2 * tube.height;
    widths.push(given.shape === 'channel' ? 2 * length : length);
  }
  if (given.shape === 'hairpin') widths.push((millimetres(given.length) ?? 0) + leadLength);
  return Math.max(0.027 * widths.reduce((sum, width) => sum + width, 0), 0.5);
}

function missing(shape: Winding['shape']): string {
  if (shape === 'drawing') return 'A coil by drawing is shown by its own drawing, not here.';
  if (shape === 'hairpin') return 'The length and the gap between the legs are not given yet.';
  if (shape === 'racetrack' || shape === 'rectangular-helix' || shape === 'channel')
    return 'The opening is not given yet: length and width.';
  return 'The diameter is not given yet, so there is nothing to draw.';
}

/** One sentence for readers who cannot see the drawing. */
function describe(
  input: DrawingInput,
  winding: DrawnWinding | null,
  tube: DrawnTube,
  part: DrawnPart | null,
  lettering: Lettering,
): string {
  const shape = shapeNames[input.coil.winding.shape];
  const turns =
    winding && !winding.turnsAssumed && input.coil.winding.shape !== 'single-turn'
      ? ` with ${winding.turns} turns`
      : '';
  const around = part
    ? `, part ${lengthText(part.outside, lettering, 'Ø ')} by ${lengthText(part.length, lettering)}`
    : '';
  return `Drawing to scale: ${shape}${turns} of ${tube.kind} tube ${lengthText(tube.width, lettering)}${around}.`;
}

function fixtureParts({ fixture }: DrawingInput): SectionInput['fixtureParts'] {
  return (fixture?.metalParts ?? []).flatMap((metal) => {
    const size = millimetres(metal.size);
    const placed = Number.isFinite(metal.r) && Number.isFinite(metal.z);
    return size && placed ? [{ name: metal.name, r: metal.r * 1000, z: metal.z * 1000, size }] : [];
  });
}

/** Views of windings that do not go round; none for those that do. */
function planViews(winding: Winding, plan: PlanInput): DrawingView[] {
  const views: (DrawingView | null)[] = [];
  if (winding.shape === 'racetrack' || winding.shape === 'rectangular-helix')
    views.push(loopPlan(winding, plan));
  if (winding.shape === 'channel') views.push(loopPlan(winding, plan), channelSide(winding, plan));
  if (winding.shape === 'hairpin') views.push(hairpinPlan(winding, plan));
  return views.filter((view) => view !== null);
}

/**
 * Draws coil, part and leads of a requirement to scale: section through the axis and view along it, or a
 * plan for windings that do not go round. Lengths go in as metres and come out as millimetres. Values that
 * are open or make no sense are left out or replaced, and a note says so; the function never throws.
 */
export function coilDrawing(input: DrawingInput, options: DrawingOptions = {}): DrawingModel {
  const notes: string[] = [];
  const lettering: Lettering = { inch: options.units === 'inch' };
  const { coil } = input;
  const given = coil.winding;
  const tube = drawnTube(coil.tube, notes);
  const part = drawnPart(input.part);
  const leads = drawnLeads(coil, tube);
  const flat = given.shape === 'pancake';
  const inside = given.shape === 'bore';
  const round = flat
    ? pancakeWinding(given, tube, notes)
    : drawnWinding(given, tube, part, leads.spacing, notes);
  const winding = round ?? loopWinding(given, tube, notes);
  const textHeight = lettersFor(winding, input, tube, part, leads.length);
  const { handing } = coil;
  const leadExit = inside ? 'axial' : handing.leadExit;
  if (inside && handing.leadExit !== null && handing.leadExit !== 'axial') {
    notes.push('Inside a part the leads can only leave along the axis; they are drawn so.');
  }

  const views: DrawingView[] = [];
  if (winding) {
    const section: SectionInput = {
      winding,
      tube,
      part,
      leads,
      leadExit,
      direction: handing.windingDirection,
      centreTap: coil.centreTap,
      faceGap: flat ? Math.max(0, millimetres(given.faceGap) ?? 0) : null,
      inside,
      fixtureParts: fixtureParts(input),
      title: round ? 'Section through the axis' : 'Section across the width',
      textHeight,
      lettering,
      openingPrefix: round ? 'Ø ' : '',
    };
    views.push(sectionView(section));
    if (round) {
      views.push(
        endView({
          winding: round,
          tube,
          part,
          leads,
          leadExit,
          leadAngleDeg: handing.leadAngleDeg,
          direction: handing.windingDirection,
          flat,
          inside,
          textHeight,
          lettering,
        }),
      );
    }
  }
  views.push(...planViews(given, { tube, part, leads, textHeight, lettering }));
  if (views.length === 0) notes.push(missing(given.shape));
  if (!leads.given && views.length > 0)
    notes.push('The leads are not given yet; short stubs are drawn dashed.');
  if ((given.shape === 'hairpin' || given.shape === 'channel') && part)
    notes.push('The part is not drawn with this shape.');
  return {
    views,
    dimensions: dimensionTable({ coil, winding, tube, part, leads, lettering }),
    notes: [...new Set(notes)],
    textHeight,
    description:
      views.length > 0 ? describe(input, winding, tube, part, lettering) : 'Nothing can be drawn yet.',
  };
}
