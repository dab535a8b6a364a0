/** What a section is drawn from, and where its tubes lie. Millimetres. */
import type { DrawnLeads, DrawnPart, DrawnTube, DrawnWinding, Lettering } from './measures.ts';
import type { Point } from './model.ts';

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
export function crossing({ winding }: SectionInput, n: number): Point {
  const x = (n - winding.turns / 2) * winding.pitch;
  return [x, -winding.radiusAt(n) * Math.cos(2 * Math.PI * n)];
}

/** The part's ends along the axis; a flat coil stands in front of its part's face. */
export function partEnds({ part, faceGap, tube }: SectionInput): { left: number; right: number } | null {
  if (!part) return null;
  const left = faceGap === null ? part.offset - part.length / 2 : tube.width / 2 + faceGap;
  return { left, right: left + part.length };
}
