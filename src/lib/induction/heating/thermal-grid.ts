import type { FacingSide } from '../field/part-model.ts';
import type { CoilAndPart } from './coil-and-part.ts';
import { conductionState, type ConductionState, type SurfaceTransfer } from './conduction.ts';
import type { HeatingInput } from './types.ts';

/** Each quadratic element becomes two cells by two. */
function cellEdges(edges: Float64Array): Float64Array {
  const out = new Float64Array(2 * edges.length - 1);
  for (let k = 0; k < edges.length; k++) {
    out[2 * k] = edges[k] as number;
    if (k + 1 < edges.length) out[2 * k + 1] = 0.5 * ((edges[k] as number) + (edges[k + 1] as number));
  }
  return out;
}

/** Conduction cells of the part: faces on the field's element lines, losses on its open surfaces. */
export function thermalState(run: CoilAndPart, input: HeatingInput, side: FacingSide): ConductionState {
  const { grid } = run.model.elements;
  const { part } = run.load;
  const emissivity = input.emissivity ?? run.material.emissivity;
  const open: SurfaceTransfer = { convection: input.convection, emissivity };
  // A bore that does not look at the coil sees mostly itself; what leaves through its ends is counted.
  const escape =
    side === 'bore' ? 1 : 1 / (1 + (part.high - part.low) / Math.max(1e-9, 2 * part.innerRadius));
  const bore: SurfaceTransfer = { convection: input.convection * escape, emissivity: emissivity * escape };
  return conductionState(
    {
      r: cellEdges(grid.r),
      z: cellEdges(grid.z),
      sides: {
        inner: part.innerRadius > 0 ? bore : null,
        outer: open,
        low: grid.half ? null : open,
        high: open,
      },
    },
    input.startTemperatureC,
  );
}

/** Where surface and core are read: cells, and the half cell to the surface. */
export interface Places {
  surface: number;
  core: number;
  half: number;
  transfer: SurfaceTransfer;
}

/** Cells where surface and core are read, for the side that looks at the coil. */
export function placesOf(run: CoilAndPart, state: ConductionState, side: FacingSide): Places {
  const { grid, nr, nz } = state;
  const nearest = (edges: Float64Array, x: number) => {
    let best = 0;
    for (let k = 0; k + 1 < edges.length; k++) if ((edges[k] as number) <= x) best = k;
    return Math.min(best, edges.length - 2);
  };
  const width = (edges: Float64Array, k: number) => (edges[k + 1] as number) - (edges[k] as number);
  const none: SurfaceTransfer = { convection: 0, emissivity: 0 };
  if (side === 'outer' || side === 'bore') {
    const row = nearest(grid.z, 0) * nr;
    const at = side === 'outer' ? nr - 1 : 0;
    const transfer = (side === 'outer' ? grid.sides.outer : grid.sides.inner) ?? none;
    return { surface: row + at, core: row + (nr - 1 - at), half: width(grid.r, at) / 2, transfer };
  }
  const rings = run.prepared.rings.rings;
  const column = nearest(grid.r, rings.reduce((sum, ring) => sum + ring.radius, 0) / rings.length);
  const at = side === 'low' ? 0 : nz - 1;
  const transfer = (side === 'low' ? grid.sides.low : grid.sides.high) ?? none;
  return {
    surface: at * nr + column,
    core: (nz - 1 - at) * nr + column,
    half: width(grid.z, at) / 2,
    transfer,
  };
}

/** Volume-weighted mean temperature of each element's four cells. */
export function elementTemperatures(run: CoilAndPart, state: ConductionState): Float64Array {
  const { nr, nz } = run.model.elements;
  const out = new Float64Array(nr * nz);
  const volume = new Float64Array(nr * nz);
  for (let c = 0; c < state.temperature.length; c++) {
    const at = (((c / state.nr) | 0) >> 1) * nr + ((c % state.nr) >> 1);
    const v = state.volume[c] as number;
    out[at] = (out[at] as number) + v * (state.temperature[c] as number);
    volume[at] = (volume[at] as number) + v;
  }
  return out.map((sum, k) => sum / (volume[k] as number));
}
