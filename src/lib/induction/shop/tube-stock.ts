/**
 * Copper tube that is stocked by standard. Everything else (other sizes, square, rectangular) is drawn to order.
 * Sources: ASTM B280 (annealed coils and drawn straight lengths), ASTM B88 types K and L, ASTM B88M types A, B, C;
 * sizes read in secondary copies of the standards.
 */
import type { TubeSection } from '../check/types.ts';

export interface StockTube {
  standard: string;
  /** m */
  outsideDiameter: number;
  wall: number;
}

const inch = 0.0254;
const inInches = (standard: string, sizes: readonly (readonly [number, number])[]): StockTube[] =>
  sizes.map(([od, wall]) => ({ standard, outsideDiameter: od * inch, wall: wall * inch }));
const metric = (standard: string, walls: readonly number[]): StockTube[] =>
  [6, 8, 10, 12, 15, 18, 22].map((od, i) => ({
    standard,
    outsideDiameter: od / 1000,
    wall: (walls[i] ?? 0) / 1000,
  }));

export const stockTubes: readonly StockTube[] = [
  ...inInches('ASTM B280 annealed', [
    [1 / 8, 0.03],
    [0.187, 0.03],
    [1 / 4, 0.03],
    [0.312, 0.032],
    [3 / 8, 0.032],
    [1 / 2, 0.032],
    [5 / 8, 0.035],
    [3 / 4, 0.035],
    [3 / 4, 0.042],
    [7 / 8, 0.045],
  ]),
  ...inInches('ASTM B280 drawn', [
    [1 / 4, 0.025],
    [3 / 8, 0.03],
    [1 / 2, 0.035],
  ]),
  ...inInches('ASTM B88 type K', [
    [3 / 8, 0.035],
    [1 / 2, 0.049],
    [5 / 8, 0.049],
    [3 / 4, 0.049],
    [7 / 8, 0.065],
  ]),
  ...inInches('ASTM B88 type L', [
    [3 / 8, 0.03],
    [1 / 2, 0.035],
    [5 / 8, 0.04],
  ]),
  ...metric('ASTM B88M type A', [0.8, 0.9, 0.9, 1.2, 1.2, 1.2, 1.6]),
  ...metric('ASTM B88M type B', [0.7, 0.8, 0.8, 0.9, 1.0, 1.0, 1.1]),
  ...metric('ASTM B88M type C', [0.6, 0.6, 0.6, 0.6, 0.7, 0.7, 0.8]),
];

/** Within these the size is the stocked one (half the usual tolerance on size and wall). */
const sameDiameter = 0.06e-3;
const sameWall = 0.04e-3;

export type StockAnswer = { stocked: true; tube: StockTube } | { stocked: false; nearest: StockTube | null };

/** Whether a section is in the size table, with the nearest size when it is not; square and rectangular have none. */
export function findStock(tube: TubeSection): StockAnswer {
  if (tube.kind !== 'round') return { stocked: false, nearest: null };
  const far = (stock: StockTube) =>
    Math.abs(stock.outsideDiameter / tube.outsideDiameter - 1) + 0.3 * Math.abs(stock.wall / tube.wall - 1);
  const nearest = stockTubes.reduce((best, stock) => (far(stock) < far(best) ? stock : best));
  const stocked =
    Math.abs(nearest.outsideDiameter - tube.outsideDiameter) <= sameDiameter &&
    Math.abs(nearest.wall - tube.wall) <= sameWall;
  return stocked ? { stocked, tube: nearest } : { stocked, nearest };
}
