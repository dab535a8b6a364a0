/**
 * The field solution against independent solutions: axisymmetric finite elements (gmsh + FreeFEM, three
 * meshes), spectral perfect-conductor limits, Bessel solutions (mpmath), time-domain steel and thin-wire
 * integrals: reference/finite-elements.json, ids as there.
 *
 * Limits are those the project promises: default bare L 0.05 %, R 0.5 %; loaded L 0.1 %, load power 0.5 %;
 * preview loaded L 0.5 %, R 2 %.
 */
import { describe, expect, it } from 'vitest';
import type { SolverSetting } from '../../src/lib/induction/check/types.ts';
import type { RingCoil } from '../../src/lib/induction/coil/rings.ts';
import type { Section } from '../../src/lib/induction/coil/section.ts';
import { loopCoil } from '../../src/lib/induction/coil/wire-path.ts';
import { MU0, skinDepth } from '../../src/lib/induction/constants/physical.ts';
import { cylinderFluxFunctions } from '../../src/lib/induction/field/bessel-ratio.ts';
import { buildBoundary, straightPanel } from '../../src/lib/induction/field/boundary.ts';
import { cheapBareInductance } from '../../src/lib/induction/field/cheap.ts';
import type { LoadGrid } from '../../src/lib/induction/field/load-grid.ts';
import {
  loadElements,
  nodeFields,
  pointFields,
  POINTS_PER_ELEMENT,
  solveLoad,
} from '../../src/lib/induction/field/load-operator.ts';
import { equidistributed } from '../../src/lib/induction/field/quadrature.ts';
import { mutualInductance } from '../../src/lib/induction/field/ring-kernel.ts';
import {
  leadPairInductance,
  pathInductance,
  thinPairInductance,
} from '../../src/lib/induction/field/segment-inductance.ts';
import { describingPermeability } from '../../src/lib/induction/materials/magnetisation.ts';
import { plainCoil } from './support/plain-coil.ts';
import { roundSection, solveCase, type PlainCase, type PlainPart } from './support/field-cases.ts';
import { check, solvedElsewhere } from './support/published-check.ts';
import { input, solvedCase, solvedCases, type SolvedCase } from './support/reference-values.ts';

function list(c: SolvedCase, name: string): number[] {
  const value = c.inputs[name];
  if (!Array.isArray(value)) throw new Error(`${c.id} has no list ${name}`);
  return value;
}

function want(c: SolvedCase, name: string): number {
  const value = c.expected[name];
  if (typeof value !== 'number') throw new Error(`${c.id} expects no number ${name}`);
  return value;
}

function ringsOf(c: SolvedCase): RingCoil['rings'] {
  const n = input(c, 'turns');
  const radii =
    'ring_centre_radii_m' in c.inputs
      ? list(c, 'ring_centre_radii_m')
      : 'ring_radii_m' in c.inputs
        ? list(c, 'ring_radii_m')
        : new Array<number>(n).fill(input(c, 'ring_centre_radius_m'));
  const zs =
    'ring_centre_z_m' in c.inputs
      ? list(c, 'ring_centre_z_m')
      : 'ring_z_m' in c.inputs
        ? list(c, 'ring_z_m')
        : radii.map((_, k) => k * input(c, 'pitch_m'));
  const middle = (Math.min(...zs) + Math.max(...zs)) / 2;
  return radii.map((radius, k) => ({ radius, z: (zs[k] ?? 0) - middle }));
}

function coilOf(c: SolvedCase, wall: number): RingCoil {
  const section: Section =
    c.inputs['section'] === 'rectangular tube'
      ? {
          kind: 'rectangular',
          halfAxial: input(c, 'tube_axial_height_m') / 2,
          halfRadial: input(c, 'tube_radial_width_m') / 2,
          wall,
          outerCorner: input(c, 'outer_corner_radius_m'),
          innerCorner: input(c, 'inner_corner_radius_m'),
        }
      : roundSection(input(c, 'tube_outer_diameter_m'), wall);
  const pitch = Number(c.inputs['pitch_m'] ?? c.inputs['radial_pitch_m'] ?? c.inputs['axial_pitch_m']);
  return { rings: ringsOf(c), section, turns: input(c, 'turns'), pitch };
}

function caseOf(c: SolvedCase): PlainCase {
  const wall = input(c, 'wall_thickness_m');
  const frequency = input(c, 'frequency_Hz');
  if (!('load_outer_diameter_m' in c.inputs)) {
    return { coil: coilOf(c, wall), copper: input(c, 'resistivity_ohm_m'), frequency, part: null };
  }
  const middle = input(c, 'load_axial_centre_offset_m');
  const half = input(c, 'load_length_m') / 2;
  const part: PlainPart = {
    outerRadius: input(c, 'load_outer_diameter_m') / 2,
    innerRadius: input(c, 'load_inner_diameter_m') / 2,
    low: middle - half,
    high: middle + half,
    resistivity: input(c, 'load_resistivity_ohm_m'),
    permeability: input(c, 'load_relative_permeability'),
  };
  return { coil: coilOf(c, wall), copper: input(c, 'coil_resistivity_ohm_m'), frequency, part };
}

const settings: SolverSetting[] = ['preview', 'default', 'fine'];
const family = (f: string) => solvedCases.filter((c) => c.family === f && c.id !== 'D-T2').map((c) => c.id);

/** The unit a name of the solved cases ends with. */
const units = [
  ['_H', 'H'],
  ['_ohm', 'Ω'],
  ['_W_per_m', 'W/m'],
  ['_var_per_m', 'var/m'],
  ['_m', 'm'],
] as const;

function compare(
  c: SolvedCase,
  quantity: string,
  value: number,
  name: string,
  rel: number,
  setting: SolverSetting,
) {
  const source = `${c.method}; ${c.tool}`;
  const unit = units.find(([suffix]) => name.endsWith(suffix))?.[1];
  check('field', {
    id: `${c.id} ${setting}`,
    quantity: unit === undefined ? quantity : `${quantity}, ${unit}`,
    source,
    standing: solvedElsewhere,
    value,
    expected: want(c, name),
    tolerance: { rel },
  });
}

describe('perfect-conductor limit of bare coils', () => {
  it.each(family('A3'))('%s', (id) => {
    const c = solvedCase(id);
    const frequency = 1e10;
    const copper = 1.75e-8;
    const wall = 0.15 * input(c, 'tube_outer_diameter_m');
    const s = solveCase({ coil: coilOf(c, wall), copper, frequency, part: null }, 'default');
    compare(c, 'L', s.inductance, 'inductance_perfect_conductor_H', 5e-4, 'default');
    const shape = s.resistance / Math.sqrt(Math.PI * frequency * MU0 * copper);
    compare(c, 'loss shape factor', shape, 'loss_shape_factor_G', 5e-3, 'default');
    let stack = 0;
    const a = input(c, 'tube_outer_diameter_m') / 2;
    for (const [i, p] of ringsOf(c).entries()) {
      for (const [j, q] of ringsOf(c).entries()) {
        stack +=
          i === j
            ? MU0 * p.radius * (Math.log((8 * p.radius) / a) - 2)
            : mutualInductance(p.radius, q.radius, p.z - q.z);
      }
    }
    compare(c, 'thin ring stack', stack, 'inductance_surface_current_H', 1e-6, 'default');
  });

  it('leaves the cheap formula within its own limits on helices', () => {
    for (const id of ['A3-05', 'A3-12']) {
      const c = solvedCase(id);
      const l = cheapBareInductance(coilOf(c, 0.001));
      compare(c, 'L by the closed formula', l, 'inductance_perfect_conductor_H', 0.06, 'preview');
    }
  });
});

describe('bare coils', () => {
  const limits = { preview: [2e-3, 0.01], default: [5e-4, 5e-3], fine: [5e-4, 5e-3] } as const;
  for (const setting of settings) {
    it.each(family('B'))(`%s, ${setting}`, (id) => {
      const c = solvedCase(id);
      const s = solveCase(caseOf(c), setting);
      compare(c, 'L', s.inductance, 'inductance_H', limits[setting][0], setting);
      compare(c, 'R', s.resistance, 'ac_resistance_ohm', limits[setting][1], setting);
      const turns = c.expected['per_turn_resistance_ohm'];
      if (!Array.isArray(turns)) throw new Error('no turns');
      for (const [k, r] of turns.entries()) {
        expect(Math.abs((s.turnPower[k] ?? 0) / r - 1)).toBeLessThan(2 * limits[setting][1]);
      }
      expect(Math.abs(s.balance)).toBeLessThan(setting === 'preview' ? 5e-3 : 5e-4);
    });
  }
});

describe('coils with a part', () => {
  const limits = { preview: [5e-3, 0.02], default: [1e-3, 5e-3], fine: [1e-3, 5e-3] } as const;
  for (const setting of settings) {
    it.each([...family('C'), ...family('D')])(`%s, ${setting}`, (id) => {
      const c = solvedCase(id);
      const s = solveCase(caseOf(c), setting);
      const [l, r] = limits[setting];
      compare(c, 'L', s.inductance, 'inductance_loaded_H', l, setting);
      compare(c, 'R', s.resistance, 'resistance_total_ohm', r, setting);
      compare(c, 'R of the part', s.load, 'resistance_load_reflected_ohm', r, setting);
      compare(c, 'R of the coil', s.coil, 'resistance_coil_loaded_ohm', r, setting);
      expect(Math.abs(s.balance)).toBeLessThan(setting === 'preview' ? 1e-3 : 1e-4);
    });
  }

  it.each([...family('C'), ...family('D')])('%s without its part', (id) => {
    const c = solvedCase(id);
    const s = solveCase({ ...caseOf(c), part: null }, 'default');
    compare(c, 'bare L', s.inductance, 'inductance_bare_H', 5e-4, 'default');
    compare(c, 'bare R', s.resistance, 'resistance_bare_ohm', 5e-3, 'default');
  });
});

/**
 * A slice of an infinite cylinder or tube, by the part's own finite elements with natural conditions at
 * both cuts: K = −H on the outside, K = +H of the bore inside.
 */
function slice(outer: number, inner: number, depth: number, layers: number) {
  const high = 0.01;
  const panels = [straightPanel(outer, -high, outer, high, 1, 0)];
  if (inner > 0) panels.push(straightPanel(inner, high, inner, -high, -1, 0));
  const b = buildBoundary([], roundSection(1, 0.1), 8, 3, [panels]);
  const body = b.bodies[0];
  if (body === undefined) throw new Error('no body');
  const size = (r: number) =>
    Math.min(depth / layers + 0.2 * Math.min(outer - r, inner > 0 ? r - inner : 1), outer / 8);
  const grid: LoadGrid = {
    r: equidistributed(inner, outer, size, 6),
    z: Float64Array.of(-high, 0, high),
    half: false,
  };
  const all = Int32Array.from({ length: b.n }, (_, k) => k);
  return { e: loadElements(b, body, grid, all, b.n, all), b, length: 2 * high };
}

/** Sum of a row block of Z: E on one surface for unit K on another (uniform along z). */
function transfer(z: { re: Float64Array; im: Float64Array; cols: number }, row: number, from: number) {
  let re = 0;
  let im = 0;
  for (let j = from; j < from + 3; j++) {
    re += z.re[row * z.cols + j] ?? 0;
    im += z.im[row * z.cols + j] ?? 0;
  }
  return { re, im };
}

describe('infinite cylinders in a uniform field', () => {
  it('E1-05: solid, closed solution and finite elements', () => {
    const c = solvedCase('E1-05');
    const d = input(c, 'diameter_m');
    const rho = input(c, 'resistivity_ohm_m');
    const f = input(c, 'frequency_Hz');
    const h = input(c, 'surface_field_A_per_m_rms');
    compare(c, 'skin depth', skinDepth(rho, f), 'skin_depth_m', 1e-9, 'default');
    const flux = cylinderFluxFunctions(d / skinDepth(rho, f));
    compare(c, 'p', flux.p, 'power_factor_p', 1e-9, 'default');
    compare(c, 'q', flux.q, 'reactive_factor_q', 1e-9, 'default');
    const { e } = slice(d / 2, 0, skinDepth(rho, f), 2);
    const n = e.nr * e.nz;
    const s = solveLoad(e, f, new Float64Array(n).fill(rho), new Float64Array(9 * n).fill(1));
    const z = transfer(s.z, 1, 0);
    compare(c, 'power by elements', z.re * h * h * Math.PI * d, 'active_power_W_per_m', 2e-3, 'default');
    compare(
      c,
      'reactive power by elements',
      z.im * h * h * Math.PI * d,
      'reactive_power_var_per_m',
      2e-3,
      'default',
    );
  });

  it('E2-03: tube with an empty bore', () => {
    const c = solvedCase('E2-03');
    const ro = input(c, 'outer_diameter_m') / 2;
    const ri = ro - input(c, 'wall_thickness_m');
    const rho = input(c, 'resistivity_ohm_m');
    const f = input(c, 'frequency_Hz');
    const h = input(c, 'outer_surface_field_A_per_m_rms');
    const { e } = slice(ro, ri, skinDepth(rho, f), 3);
    const n = e.nr * e.nz;
    const s = solveLoad(e, f, new Float64Array(n).fill(rho), new Float64Array(9 * n).fill(1));
    // Bore: E = −jωμ0·Hb·ri/2 = Zbo·(−H) + Zbb·Hb.
    const zbo = transfer(s.z, 4, 0);
    const zbb = transfer(s.z, 4, 3);
    const zoo = transfer(s.z, 1, 0);
    const zob = transfer(s.z, 1, 3);
    const dr = zbb.re;
    const di = zbb.im + (2 * Math.PI * f * MU0 * ri) / 2;
    const dn = dr * dr + di * di;
    const br = (zbo.re * dr + zbo.im * di) / dn;
    const bi = (zbo.im * dr - zbo.re * di) / dn;
    compare(c, 'bore field ratio', Math.hypot(br, bi), 'bore_field_ratio_magnitude', 5e-3, 'default');
    // E at the outside for H = 1: −Zoo + Zob·b; power into the metal −E·H*.
    const er = zoo.re - (zob.re * br - zob.im * bi);
    const ei = zoo.im - (zob.re * bi + zob.im * br);
    compare(c, 'power', er * h * h * 2 * Math.PI * ro, 'active_power_W_per_m', 3e-3, 'default');
    compare(c, 'reactive power', ei * h * h * 2 * Math.PI * ro, 'reactive_power_var_per_m', 3e-3, 'default');
  });

  it('D-T2: saturating steel, first-harmonic permeability against time-domain loss', () => {
    const c = solvedCase('D-T2');
    const d = input(c, 'diameter_m');
    const rho = input(c, 'resistivity_ohm_m');
    const f = input(c, 'frequency_Hz');
    const h = input(c, 'surface_field_A_per_m_rms');
    const law = {
      initialPermeability: input(c, 'froehlich_initial_relative_permeability'),
      saturation: input(c, 'froehlich_saturation_T'),
      curieC: 770,
    };
    const { e, b } = slice(d / 2, 0, skinDepth(rho, f, 46), 2);
    const n = e.nr * e.nz;
    let mu = new Float64Array(POINTS_PER_ELEMENT * n).fill(50);
    let s = solveLoad(e, f, new Float64Array(n).fill(rho), mu);
    for (let round = 0; round < 30; round++) {
      const k = { re: new Float64Array(b.n).fill(-h), im: new Float64Array(b.n) };
      const field = pointFields(e, f, mu, nodeFields(s, k));
      mu = field.map((x) => describingPermeability(law, 20, Math.SQRT2 * x));
      s = solveLoad(e, f, new Float64Array(n).fill(rho), mu);
    }
    const z = transfer(s.z, 1, 0);
    // The method's own stated error for cold steel, not the discretisation's.
    compare(c, 'power', z.re * h * h * Math.PI * d, 'active_power_time_domain_W_per_m', 0.05, 'default');
    compare(
      c,
      'reactive power',
      z.im * h * h * Math.PI * d,
      'reactive_power_fundamental_time_domain_var_per_m',
      0.15,
      'default',
    );
  });
});

describe('thin wires along their true path', () => {
  it('G-02: stacked rounded rectangles', () => {
    const c = solvedCase('G-02');
    const loop = loopCoil(
      plainCoil({
        winding: {
          shape: 'rectangular-helix',
          insideLength: 0.08,
          insideWidth: 0.03,
          cornerRadius: 0.006,
          turns: 4,
          pitch: 0.011,
        },
        outsideDiameter: 0.008,
      }),
    );
    compare(c, 'L', pathInductance(loop.loops, 0.004), 'inductance_H', 5e-4, 'default');
    expect(loop.turnLength * 4).toBeCloseTo(input(c, 'wire_path_length_m'), 9);
  });

  it('G-08: hairpin', () => {
    const c = solvedCase('G-08');
    const loop = loopCoil(
      plainCoil({
        winding: { shape: 'hairpin', length: 0.3, legGap: 0.032, turns: 1, pitch: 0.01 },
        outsideDiameter: 0.008,
      }),
    );
    compare(c, 'L', pathInductance(loop.loops, 0.004), 'inductance_H', 5e-4, 'default');
  });

  it('G-10: true helix with legs and leads', () => {
    const c = solvedCase('G-10');
    const r = input(c, 'helix_radius_m');
    const p = input(c, 'pitch_m');
    const a = input(c, 'conductor_diameter_m') / 2;
    const s = input(c, 'lead_spacing_m') / 2;
    const out = r + input(c, 'radial_leg_m');
    const half = (3 * p) / 2;
    const path = (lead: number) => {
      const points = [out + lead, 0, -s, out, 0, -s, out, 0, -half, r, 0, -half];
      const step = Math.PI / 8;
      const v = r * Math.sqrt(step / Math.sin(step));
      for (let k = 1; k < 48; k++) {
        points.push(v * Math.cos(k * step), v * Math.sin(k * step), -half + (2 * half * k) / 48);
      }
      points.push(r, 0, half, out, 0, half, out, 0, s, out + lead, 0, s, out + lead, 0, -s);
      return Float64Array.from(points);
    };
    for (const [lead, name] of [
      [0.2, 'inductance_with_200mm_leads_H'],
      [0.1, 'inductance_with_100mm_leads_H'],
      [0, 'inductance_with_zero_leads_H'],
    ] as const) {
      compare(c, `L with ${lead} m leads`, pathInductance([path(lead)], a), name, 1e-3, 'default');
    }
    // What the product adds to a ring solution, on the reference's own ring solution.
    let stack = 0;
    for (let i = 0; i < 3; i++)
      for (let j = 0; j < 3; j++) stack += mutualInductance(r, r, Math.hypot((i - j) * p, a));
    const pair = 0.2 * (leadPairInductance(2 * s, a) - thinPairInductance(2 * s, a));
    const total =
      want(c, 'ring_stack_perfect_conductor_HF_H') + pathInductance([path(0.2)], a) - stack + pair;
    compare(
      c,
      'coil with leads',
      total,
      'estimated_perfect_conductor_HF_inductance_with_200mm_leads_H',
      0.02,
      'default',
    );
  });
});
