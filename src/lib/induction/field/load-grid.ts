import type { PartBody } from '../coil/rings.ts';
import { equidistributed } from './quadrature.ts';

/** Tensor grid of quadratic elements on a part's section: element edges in r and z, ascending, m. */
export interface LoadGrid {
  r: Float64Array;
  z: Float64Array;
  /** True: only z ≥ 0 is meshed, with the natural mirror condition at z = 0. */
  half: boolean;
}

/** Skin depths met in the part: next to its surface, and below a heated layer of `layer` metres. */
export interface LoadDepths {
  surface: number;
  layer: number | null;
  below: number;
  /** Which cylindrical side the layer is on. */
  layerSide: 'outer' | 'bore' | 'low' | 'high';
}

/** Geometric growth 1.6 of element size as a size function h(d) = h1·0.47/0.6 + 0.47·d. */
const SLOPE = Math.log(1.6);
const FIRST = SLOPE / 0.6;

/**
 * Grid with first elements of `share`·δ at the surfaces (and at the inner edge of a heated layer), growth
 * 1.6, at most a fifth of the wall in r and the boundary panel size in z.
 *
 * @param share 0.7 by default, 1.2 for the preview, 0.5 for the fine setting
 * @param panelSize size of the boundary panels along the side, as a function of z
 */
export function loadGrid(
  body: PartBody,
  depths: LoadDepths,
  share: number,
  panelSize: (z: number) => number,
  endSize: (r: number) => number,
  half: boolean,
): LoadGrid {
  const { innerRadius: ri, outerRadius: ro, low, high } = body;
  const wall = ro - ri;
  const length = high - low;
  const h1 = Math.min(share * depths.surface, wall / 3) * FIRST;
  const hz = Math.min(share * depths.surface, length / 6) * FIRST;
  const layer = depths.layer;
  const inLayer = layer === null ? 0 : Math.min(share * depths.below, wall / 3) * FIRST;
  const rLayer =
    layer === null || layer >= wall * 0.999
      ? null
      : depths.layerSide === 'outer'
        ? ro - layer
        : depths.layerSide === 'bore'
          ? ri + layer
          : null;
  const zLayer =
    layer === null || layer >= length * 0.999
      ? null
      : depths.layerSide === 'low'
        ? low + layer
        : depths.layerSide === 'high'
          ? high - layer
          : null;
  const radial = (r: number) => {
    let h = Math.min(wall / 5, h1 + SLOPE * (ro - r));
    if (ri > 0) h = Math.min(h, h1 + SLOPE * (r - ri));
    if (rLayer !== null) h = Math.min(h, inLayer + SLOPE * Math.abs(r - rLayer));
    if (zLayer !== null || depths.layerSide === 'low' || depths.layerSide === 'high')
      h = Math.min(h, endSize(r));
    return h;
  };
  const axial = (z: number) => {
    let h = Math.min(panelSize(z), hz + SLOPE * Math.min(z - low, high - z));
    if (zLayer !== null) h = Math.min(h, inLayer + SLOPE * Math.abs(z - zLayer));
    return h;
  };
  const rStops = rLayer === null ? [ri, ro] : [ri, rLayer, ro];
  const from = half ? 0 : low;
  const zStops = zLayer === null ? [from, high] : [from, zLayer, high];
  return {
    r: joined(rStops, radial, 3),
    z: joined(zStops, axial, half ? 3 : 5),
    half,
  };
}

function joined(stops: number[], size: (x: number) => number, least: number): Float64Array {
  const all: number[] = [stops[0] as number];
  for (let k = 0; k + 1 < stops.length; k++) {
    const part = equidistributed(
      stops[k] as number,
      stops[k + 1] as number,
      size,
      stops.length > 2 ? 2 : least,
    );
    for (let i = 1; i < part.length; i++) all.push(part[i] as number);
  }
  return Float64Array.from(all);
}
