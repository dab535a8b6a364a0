import { InductionInputError } from '../input-error.ts';
import { MU0, skinDepth } from '../constants/physical.ts';
import { describingPermeability } from '../materials/magnetisation.ts';
import type { Material } from '../materials/types.ts';
import type { CoilBlock, FieldSolution } from './coil-block.ts';
import { prepareUpdates, solveField } from './coil-block.ts';
import type { FieldGeometry, KeptLoad } from './field-geometry.ts';
import { loadGrid } from './load-grid.ts';
import {
  loadElements,
  nodeFields,
  pointFields,
  POINTS_PER_ELEMENT,
  solveLoad,
  type LoadElements,
  type LoadSolution,
} from './load-operator.ts';
import type { PartTemperature } from './thermal-state.ts';

/** One part on the axis with its material and the temperature of every element of its grid, °C. */
export interface PartModel {
  load: KeptLoad;
  material: Material;
  elements: LoadElements;
  temperature: Float64Array;
}

/** The side of a part that its coil looks at. */
export type FacingSide = 'outer' | 'bore' | 'low' | 'high';

/** Side of the part nearest to most turns (its cylindrical sides before its ends). */
export function facingSide(g: FieldGeometry, load: KeptLoad): FacingSide {
  const votes: Record<FacingSide, number> = { outer: 0, bore: 0, low: 0, high: 0 };
  const { part } = load;
  for (const ring of g.coil.rings) {
    if (ring.radius >= part.outerRadius) votes.outer++;
    else if (ring.radius <= part.innerRadius) votes.bore++;
    else if (ring.z < part.low) votes.low++;
    else votes.high++;
  }
  const order: FacingSide[] = ['outer', 'bore', 'low', 'high'];
  return order.reduce((best, side) => (votes[side] > votes[best] ? side : best), 'outer');
}

/** Peak field the coil can set up near the part, A/m: √2·N·I over its length (for a first permeability). */
export function estimatedPeakField(g: FieldGeometry, current: number): number {
  const length = Math.max(g.coil.rings.length * g.coil.pitch, 2 * g.coil.section.halfAxial);
  return (Math.SQRT2 * current * g.coil.rings.length) / length;
}

/** Skin depth of a material at T °C and a peak field, with the first-harmonic permeability, m. */
export function depthAt(
  material: Material,
  temperatureC: number,
  frequency: number,
  peakField: number,
): number {
  const law = material.magnetisation;
  const mu = law === null ? 1 : describingPermeability(law, temperatureC, peakField);
  return skinDepth(material.resistivity(temperatureC), frequency, mu);
}

/**
 * Builds a part's grid for a frequency and thermal state.
 *
 * @param current coil current expected, A rms: sets the permeability the grid must resolve
 * @param smallestDepth smallest skin depth the grid will meet later, m (heating runs); null: this state's
 * @param heatedLength axial length about the coil's middle that is at `temperature.surface`; null: all
 */
export function partModel(
  g: FieldGeometry,
  load: KeptLoad,
  material: Material,
  temperature: PartTemperature,
  frequency: number,
  current: number,
  heatedLength: number | null,
  smallestDepth: number | null = null,
): PartModel {
  if (!material.conducts) {
    throw new InductionInputError(
      'does-not-conduct',
      'part.material',
      'The part does not conduct: it needs a susceptor.',
    );
  }
  const peak = estimatedPeakField(g, current);
  const side = facingSide(g, load);
  const hot = depthAt(material, temperature.surface, frequency, peak);
  const core = depthAt(material, temperature.core, frequency, peak);
  const layered = temperature.depth !== null && temperature.surface !== temperature.core;
  const partial = layered && heatedLength !== null && heatedLength < load.part.high - load.part.low;
  const surface = smallestDepth ?? (partial ? Math.min(hot, core) : hot);
  const grid = loadGrid(
    load.part,
    { surface, layer: layered ? temperature.depth : null, below: Math.min(core, surface), layerSide: side },
    g.resolution.depthShare,
    load.sizes.side,
    (r) => Math.min(load.sizes.end('low', r), load.sizes.end('high', r)),
    g.symmetric,
  );
  const local = new Int32Array(g.boundary.n).fill(-1);
  for (let k = load.body.start; k < load.body.start + load.body.count; k++) {
    local[k] = (g.column[k] as number) - load.start;
  }
  const kept = g.kept.subarray(load.start, load.start + load.count);
  const elements = loadElements(g.boundary, load.body, grid, local, load.count, kept);
  const t = new Float64Array(elements.nr * elements.nz).fill(temperature.surface);
  if (layered) layerTemperatures(elements, load, side, temperature, partial ? heatedLength : null, t);
  return { load, material, elements, temperature: t };
}

function layerTemperatures(
  e: LoadElements,
  load: KeptLoad,
  side: FacingSide,
  temperature: PartTemperature,
  heatedLength: number | null,
  out: Float64Array,
): void {
  const depth = temperature.depth ?? Number.POSITIVE_INFINITY;
  for (let kz = 0; kz < e.nz; kz++) {
    const z = 0.5 * ((e.grid.z[kz] as number) + (e.grid.z[kz + 1] as number));
    for (let kr = 0; kr < e.nr; kr++) {
      const r = 0.5 * ((e.grid.r[kr] as number) + (e.grid.r[kr + 1] as number));
      const below =
        side === 'outer'
          ? load.part.outerRadius - r
          : side === 'bore'
            ? r - load.part.innerRadius
            : side === 'low'
              ? z - load.part.low
              : load.part.high - z;
      const inside =
        heatedLength === null || side === 'low' || side === 'high' || Math.abs(z) <= heatedLength / 2;
      out[kz * e.nr + kr] = below <= depth && inside ? temperature.surface : temperature.core;
    }
  }
}

/** Impedance of the rings in series, Ω: coil's own and parts' share of the resistance, and reactance. */
export interface RingImpedance {
  own: number;
  load: number;
  reactance: number;
}

/**
 * Current in the rings, A rms, for an impedance: what a drive makes of it. Asked in every round of the
 * permeability loop, so that a saturating part and its drive agree.
 */
export type RingCurrent = (impedance: RingImpedance) => number;

/** Fields with parts in a thermal state. */
export interface PartsSolution {
  field: FieldSolution;
  /** A rms. */
  current: number;
  loads: LoadSolution[];
  /** Relative permeability of each part: 9 Gauss points per element. */
  permeability: Float64Array[];
  resistivity: Float64Array[];
  iterations: number;
  converged: boolean;
}

/** Exponent of a step of the permeability, by how often the change has grown. */
const RELAXATION = [1.25, 1, 0.5] as const;

/** Most rounds of the permeability loop. */
const MOST_ROUNDS = 25;

/**
 * Solves coil and parts, with the describing-function permeability of saturating parts iterated until the
 * impedance settles: μ ← μ·(μ_new/μ)^x with x = 1.25, less once the change grows. The field pushed out by a smaller
 * permeability comes back in part, so that plain steps (x = 1) fall short by 0.2 to 0.4 of the way.
 *
 * @param start permeability to start from (a former solution's), else from the estimated field
 * @param rounds exactly so many rounds; null: until the impedance settles
 */
export function solveParts(
  block: CoilBlock,
  parts: PartModel[],
  ringCurrent: RingCurrent,
  start: Float64Array[] | null = null,
  rounds: number | null = null,
): PartsSolution {
  const g = block.geometry;
  let current = ringCurrent(bareImpedance(block));
  const resistivity = parts.map((p) => p.temperature.map((t) => p.material.resistivity(t)));
  const peak = estimatedPeakField(g, current);
  const permeability = parts.map((p, q) => {
    const law = p.material.magnetisation;
    const before = start?.[q];
    return Float64Array.from({ length: POINTS_PER_ELEMENT * p.temperature.length }, (_, k) => {
      const t = p.temperature[(k / POINTS_PER_ELEMENT) | 0] as number;
      if (law === null || t >= law.curieC) return 1;
      const known = before?.[k] ?? 0;
      return known > 1 ? known : describingPermeability(law, t, peak);
    });
  });
  const nonlinear = parts.some((p) => isSaturating(p));
  if (nonlinear) prepareUpdates(block);
  let last: FieldSolution | null = null;
  let lastChange = Number.POSITIVE_INFINITY;
  let grown = 0;
  for (let round = 1; ; round++) {
    const loads = parts.map((p, q) =>
      solveLoad(p.elements, block.frequency, resistivity[q] as Float64Array, permeability[q] as Float64Array),
    );
    const field = solveField(
      block,
      loads.map((l) => l.z),
    );
    current = ringCurrent(impedanceOf(field));
    const change =
      last === null
        ? Number.POSITIVE_INFINITY
        : Math.hypot(field.resistance - last.resistance, field.reactance - last.reactance) /
          Math.hypot(field.resistance, field.reactance);
    const settled = rounds === null ? change < g.resolution.tolerance : round >= rounds;
    const converged = !nonlinear || settled;
    if (converged || round >= MOST_ROUNDS) {
      return { field, current, loads, permeability, resistivity, iterations: round, converged };
    }
    if (change > lastChange) grown++;
    lastChange = change;
    last = field;
    const relax = RELAXATION[Math.min(grown, 2)] as number;
    for (const [q, p] of parts.entries()) {
      update(
        g,
        block.frequency,
        p,
        field,
        loads[q] as LoadSolution,
        current,
        permeability[q] as Float64Array,
        relax,
      );
    }
  }
}

/** The rings without parts: where a power or voltage drive starts from. */
function bareImpedance(block: CoilBlock): RingImpedance {
  const nt = block.geometry.turnColumns;
  const omegaMu = 2 * Math.PI * block.frequency * MU0;
  let own = 0;
  let reactance = 0;
  for (const [t, turn] of block.geometry.turns.entries()) {
    const times = turn.mirror >= 0 && turn.mirror !== turn.turn ? 2 : 1;
    own += times * (block.bare.re[nt + t] as number) * omegaMu;
    reactance += times * (block.bare.im[nt + t] as number) * omegaMu;
  }
  return { own, load: 0, reactance };
}

export function impedanceOf(field: FieldSolution): RingImpedance {
  const sum = (list: number[]) => list.reduce((total, x) => total + x, 0);
  return { own: sum(field.turnPower), load: sum(field.partPower), reactance: field.reactance };
}

/** Whether the part's permeability depends on the field in this state. */
export function isSaturating(p: PartModel): boolean {
  const law = p.material.magnetisation;
  if (law === null || law.saturation > 1e6) return false;
  return p.temperature.some((t) => t < law.curieC);
}

function update(
  g: FieldGeometry,
  frequency: number,
  p: PartModel,
  field: FieldSolution,
  load: LoadSolution,
  current: number,
  mu: Float64Array,
  relax: number,
): void {
  const law = p.material.magnetisation;
  if (law === null) return;
  const from = p.load.start;
  const k = {
    re: field.k.re.subarray(from, from + p.load.count),
    im: field.k.im.subarray(from, from + p.load.count),
  };
  const h = pointFields(p.elements, frequency, mu, nodeFields(load, k));
  for (let i = 0; i < mu.length; i++) {
    const t = p.temperature[(i / POINTS_PER_ELEMENT) | 0] as number;
    if (t >= law.curieC) continue;
    const next = describingPermeability(law, t, Math.SQRT2 * (h[i] as number) * current);
    const old = mu[i] as number;
    mu[i] = relax === 1 ? next : old * (next / old) ** relax;
  }
}
