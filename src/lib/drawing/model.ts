/**
 * A drawing as data: primitives in millimetres, x to the right, y up (as on paper, and as in DXF).
 * The screen, the PDF sheet and the DXF file are all made from this one model. No DOM here.
 */

/** What a line stands for; renderers choose width, dash and colour, DXF makes it a layer. */
export type LineKind =
  'outline' | 'behind' | 'open' | 'centre' | 'part' | 'heated' | 'lead' | 'fixture' | 'dimension' | 'water';

/** `void` is the colour of the ground: a bore seen in section, or a part that hides what is behind. */
export type Fill = 'none' | 'solid' | 'void' | 'hatch';

export type Primitive =
  | { type: 'line'; kind: LineKind; x1: number; y1: number; x2: number; y2: number }
  | { type: 'circle'; kind: LineKind; cx: number; cy: number; r: number; fill: Fill }
  | { type: 'arc'; kind: LineKind; cx: number; cy: number; r: number; startDeg: number; endDeg: number }
  | { type: 'polyline'; kind: LineKind; points: Point[]; closed: boolean; fill: Fill }
  | {
      type: 'text';
      kind: LineKind;
      x: number;
      y: number;
      text: string;
      anchor: 'start' | 'middle' | 'end';
      /** Counter-clockwise. */
      turnDeg: number;
    };

export type Point = readonly [number, number];

export interface Bounds {
  x: number;
  y: number;
  width: number;
  height: number;
}

export interface DrawingView {
  id: 'section' | 'end' | 'plan' | 'side';
  title: string;
  /** Around everything in the view, text and margin included. */
  bounds: Bounds;
  primitives: Primitive[];
}

/** One line of the table that says in words what the drawing says in lines. */
export interface DimensionRow {
  name: string;
  /** As drawn, with its unit. */
  text: string;
  /** Metres for lengths, plain for counts and angles; null where the value is open. */
  value: number | null;
  unit: 'm' | 'deg' | '1';
}

export interface DrawingModel {
  views: DrawingView[];
  dimensions: DimensionRow[];
  /** What could not be drawn, or was drawn as an assumption. */
  notes: string[];
  /** Height of the lettering in millimetres of the drawing. */
  textHeight: number;
  /** One sentence that says what is drawn. */
  description: string;
}
