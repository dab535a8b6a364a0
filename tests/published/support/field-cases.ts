import type { SolverSetting } from '../../../src/lib/induction/check/types.ts';
import type { PartBody, RingCoil } from '../../../src/lib/induction/coil/rings.ts';
import type { Section } from '../../../src/lib/induction/coil/section.ts';
import { skinDepth } from '../../../src/lib/induction/constants/physical.ts';
import { coilBlock, solveField, type FieldSolution } from '../../../src/lib/induction/field/coil-block.ts';
import {
  prepareGeometry,
  resolutionOf,
  type FieldGeometry,
} from '../../../src/lib/induction/field/field-geometry.ts';
import { loadGrid } from '../../../src/lib/induction/field/load-grid.ts';
import {
  loadElements,
  POINTS_PER_ELEMENT,
  solveLoad,
  type LoadElements,
} from '../../../src/lib/induction/field/load-operator.ts';

/** A part with one resistivity and permeability throughout. */
export interface PlainPart extends PartBody {
  resistivity: number;
  permeability: number;
}

export interface PlainCase {
  coil: RingCoil;
  copper: number;
  frequency: number;
  part: PlainPart | null;
}

export function roundSection(outsideDiameter: number, wall: number): Section {
  const a = outsideDiameter / 2;
  return { kind: 'round', halfAxial: a, halfRadial: a, radius: a, wall };
}

export function helix(turns: number, centreRadius: number, pitch: number, section: Section): RingCoil {
  const rings = Array.from({ length: turns }, (_, k) => ({
    radius: centreRadius,
    z: (k - (turns - 1) / 2) * pitch,
  }));
  return { rings, section, turns, pitch };
}

/** Finite elements of a part of the geometry for the given skin depth. */
export function elementsOf(g: FieldGeometry, depth: number, index = 0): LoadElements {
  const load = g.loads[index];
  if (load === undefined) throw new Error('no part');
  const grid = loadGrid(
    load.part,
    { surface: depth, layer: null, below: depth, layerSide: 'outer' },
    g.resolution.depthShare,
    load.sizes.side,
    (r) => Math.min(load.sizes.end('low', r), load.sizes.end('high', r)),
    // Half a grid only for a part that lies across the mirror plane.
    g.symmetric && load.part.low < 0,
  );
  const local = new Int32Array(g.boundary.n).fill(-1);
  for (let k = load.body.start; k < load.body.start + load.body.count; k++) {
    local[k] = (g.column[k] ?? 0) - load.start;
  }
  return loadElements(
    g.boundary,
    load.body,
    grid,
    local,
    load.count,
    g.kept.subarray(load.start, load.start + load.count),
  );
}

/** Solves a case with plain numbers for its materials. */
export function solveCase(
  c: PlainCase,
  setting: SolverSetting,
): FieldSolution & { inductance: number; coil: number; load: number } {
  const parts = c.part === null ? [] : [c.part];
  const g = prepareGeometry(c.coil, parts, resolutionOf(setting, c.coil, parts));
  const block = coilBlock(g, c.copper, c.frequency);
  const operators = [];
  if (c.part !== null) {
    const e = elementsOf(g, skinDepth(c.part.resistivity, c.frequency, c.part.permeability));
    const n = e.nr * e.nz;
    const rho = new Float64Array(n).fill(c.part.resistivity);
    const mu = new Float64Array(POINTS_PER_ELEMENT * n).fill(c.part.permeability);
    operators.push(solveLoad(e, c.frequency, rho, mu).z);
  }
  const field = solveField(block, operators);
  return {
    ...field,
    inductance: field.reactance / (2 * Math.PI * c.frequency),
    coil: field.turnPower.reduce((sum, p) => sum + p, 0),
    load: field.partPower.reduce((sum, p) => sum + p, 0),
  };
}
