import type { LoadGrid } from './load-grid.ts';
import type { PartModel } from './part-model.ts';
import { POINTS_PER_ELEMENT } from './load-operator.ts';
import { gaussLegendre } from './quadrature.ts';

interface Known {
  grid: LoadGrid;
  values: Float64Array;
}

/**
 * Permeability last found in a part, by thermal state: what the next solution of nearly the same coil and part
 * starts from. It saves rounds of the permeability loop; what the loop settles at stays within its tolerance.
 *
 * Kept by the caller for one run of questions, so that the same run always gives the same figures.
 */
export class PermeabilityMemory {
  private constructor(
    private readonly known: Map<string, Known>,
    /** Rounds of a solution that starts from here; null: until it settles. */
    readonly rounds: number | null,
  ) {}

  static empty(): PermeabilityMemory {
    return new PermeabilityMemory(new Map(), null);
  }

  /**
   * The same memory for questions whose differences are wanted: each starts from what is kept, does the same number of
   * rounds and leaves nothing behind, so that what has not settled is the same in all of them and cancels.
   */
  forDifferences(rounds: number): PermeabilityMemory {
    return new PermeabilityMemory(this.known, rounds);
  }

  /** Starting values at the Gauss points of a model's grid, taken from the nearest known point; null: none known. */
  start(state: string, model: PartModel): Float64Array | null {
    const before = this.known.get(state);
    return before === undefined ? null : carriedOver(before, model.elements.grid);
  }

  keep(state: string, model: PartModel, values: Float64Array): void {
    if (this.rounds === null) this.known.set(state, { grid: model.elements.grid, values });
  }
}

const gauss = gaussLegendre(3).x;

/** The three Gauss points of every interval, ascending. */
function pointsOf(edges: Float64Array): Float64Array {
  const out = new Float64Array(3 * (edges.length - 1));
  for (let k = 0; k + 1 < edges.length; k++) {
    const low = edges[k] as number;
    const half = 0.5 * ((edges[k + 1] as number) - low);
    for (let q = 0; q < 3; q++) out[3 * k + q] = low + half * (1 + (gauss[q] as number));
  }
  return out;
}

/** For every wanted coordinate (in any order) the place of the nearest of an ascending list. */
function nearest(list: Float64Array, wanted: Float64Array): Int32Array {
  return Int32Array.from(wanted, (x) => {
    let low = 0;
    let high = list.length - 1;
    while (high - low > 1) {
      const mid = (low + high) >> 1;
      if ((list[mid] as number) <= x) low = mid;
      else high = mid;
    }
    return x - (list[low] as number) <= (list[high] as number) - x ? low : high;
  });
}

function carriedOver(before: Known, grid: LoadGrid): Float64Array {
  const nr = grid.r.length - 1;
  const nz = grid.z.length - 1;
  const oldNr = before.grid.r.length - 1;
  const z = pointsOf(grid.z);
  const inR = nearest(pointsOf(before.grid.r), pointsOf(grid.r));
  // A half grid stands for both sides of the mirror plane.
  const inZ = nearest(pointsOf(before.grid.z), before.grid.half ? z.map(Math.abs) : z);
  const out = new Float64Array(POINTS_PER_ELEMENT * nr * nz);
  for (let pz = 0; pz < 3 * nz; pz++) {
    for (let pr = 0; pr < 3 * nr; pr++) {
      const from = placeOf(inR[pr] as number, inZ[pz] as number, oldNr);
      out[placeOf(pr, pz, nr)] = before.values[from] as number;
    }
  }
  return out;
}

/** Index of a Gauss point (numbered through in r and in z) in the order of the permeability. */
function placeOf(pr: number, pz: number, nr: number): number {
  const element = ((pz / 3) | 0) * nr + ((pr / 3) | 0);
  return POINTS_PER_ELEMENT * element + 3 * (pz % 3) + (pr % 3);
}
