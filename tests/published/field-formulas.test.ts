/**
 * Kernel, skin effect, cylinder functions, straight leads and loops against handbook tables and closed
 * formulas. Every entry names its source in reference/values.json.
 */
import { describe, expect, it } from 'vitest';
import { MU0, skinDepth } from '../../src/lib/induction/constants/physical.ts';
import { coilBlock, solveField } from '../../src/lib/induction/field/coil-block.ts';
import { cylinderFluxFunctions } from '../../src/lib/induction/field/bessel-ratio.ts';
import { prepareGeometry, resolutionOf } from '../../src/lib/induction/field/field-geometry.ts';
import { gaussLegendre } from '../../src/lib/induction/field/quadrature.ts';
import { mutualInductance } from '../../src/lib/induction/field/ring-kernel.ts';
import {
  leadPairInductance,
  pathInductance,
  thinPairInductance,
} from '../../src/lib/induction/field/segment-inductance.ts';
import { straightTubeImpedance } from '../../src/lib/induction/field/tube-operator.ts';
import type { RingCoil } from '../../src/lib/induction/coil/rings.ts';
import { check } from './support/published-check.ts';
import { input, single, valuesOf } from './support/reference-values.ts';

const COPPER_20 = 1.7241e-8;
const INCH = 0.0254;
const MICRO = 1e6;

/** Current sheet from the ring kernel: (2N²/l²)∫(l−u)·M(u) du, the logarithm at u = 0 smoothed. */
function currentSheet(turns: number, diameter: number, length: number): number {
  const rule = gaussLegendre(48);
  const r = diameter / 2;
  const stops = [0, Math.min(length, 0.2 * r), Math.min(length, 2 * r), length];
  let sum = 0;
  for (let k = 0; k + 1 < stops.length; k++) {
    const a = stops[k] ?? 0;
    const b = stops[k + 1] ?? 0;
    if (b <= a) continue;
    for (let q = 0; q < rule.x.length; q++) {
      const u = (1 + (rule.x[q] ?? 0)) / 2;
      const x = a + (b - a) * u ** 3;
      const w = ((rule.w[q] ?? 0) / 2) * 3 * u * u * (b - a);
      sum += w * (length - x) * mutualInductance(r, r, x);
    }
  }
  return (2 * turns * turns * sum) / (length * length);
}

function roundCoil(turns: number, radius: number, a: number, wall: number, pitch: number): RingCoil {
  const rings = Array.from({ length: turns }, (_, k) => ({ radius, z: (k - (turns - 1) / 2) * pitch }));
  return { rings, section: { kind: 'round', halfAxial: a, halfRadial: a, radius: a, wall }, turns, pitch };
}

function solveBare(coil: RingCoil, resistivity: number, frequency: number) {
  const geometry = prepareGeometry(coil, [], resolutionOf('default', coil, []));
  return solveField(coilBlock(geometry, resistivity, frequency), []);
}

describe('ring kernel', () => {
  it.each(valuesOf('maxwell_').map((v) => [v.id, v] as const))('mutual inductance of circles %s', (_, v) => {
    const m =
      mutualInductance(input(v, 'A_cm') / 100, input(v, 'a_cm') / 100, input(v, 'd_cm') / 100) * MICRO;
    check('field', { ...v, value: m, expected: single(v) });
  });

  it.each(valuesOf('grover_f_').map((v) => [v.id, v] as const))('factor f of Grover %s', (_, v) => {
    // k'² = ((A−a)²+d²)/((A+a)²+d²) with A = a: choose d for it. M[µH] = f·√(Aa), lengths in cm.
    const kp2 = input(v, 'kprime2');
    const a = 0.1;
    const d = 2 * a * Math.sqrt(kp2 / (1 - kp2));
    check('field', { ...v, value: (mutualInductance(a, a, d) * MICRO) / (a * 100), expected: single(v) });
  });

  it.each(valuesOf('nagaoka_').map((v) => [v.id, v] as const))(
    'gives the coefficient of the current sheet %s',
    (_, v) => {
      const ratio = input(v, 'D_over_l');
      const d = 0.1;
      const l = d / ratio;
      const long = (MU0 * Math.PI * d * d) / 4 / l;
      check('field', { ...v, value: currentSheet(1, d, l) / long, expected: single(v) });
    },
  );

  it.each(valuesOf('sheet_').map((v) => [v.id, v] as const))('current-sheet inductance %s', (_, v) => {
    const l = currentSheet(input(v, 'N'), input(v, 'D_mm') / 1000, input(v, 'l_mm') / 1000) * MICRO;
    check('field', { ...v, value: l, expected: single(v) });
  });

  it.each(valuesOf('rosa_B_').map((v) => [v.id, v] as const))(
    'ring stack less current sheet gives Rosa %s',
    (_, v) => {
      // Large rings: N·(D/2)·μ0·(A + B) = L_sheet − L_rings, with uniform current A = 5/4 − ln 2 + ln(d/p).
      const n = input(v, 'turns');
      const pitch = 0.01;
      const wire = 0.005;
      const d = 200;
      let rings = n * MU0 * (d / 2) * (Math.log((8 * d) / wire) - 1.75);
      for (let k = 1; k < n; k++) rings += 2 * (n - k) * mutualInductance(d / 2, d / 2, k * pitch);
      const a = 1.25 - Math.log(2) + Math.log(wire / pitch);
      const b = (currentSheet(n, d, n * pitch) - rings) / (MU0 * n * (d / 2)) - a;
      check('field', { ...v, value: b, expected: single(v), tolerance: { abs: 3e-4 } });
    },
  );

  it.each(valuesOf('spiral_ring_').map((v) => [v.id, v] as const))('flat spiral as rings %s', (_, v) => {
    const a = input(v, 'od_mm') / 2000;
    const first = input(v, 'r_in_mm') / 1000 + a;
    const radii = Array.from({ length: input(v, 'N') }, (__, k) => first + (k * input(v, 'pitch_mm')) / 1000);
    let l = 0;
    for (const p of radii) {
      for (const q of radii) l += p === q ? MU0 * p * (Math.log((8 * p) / a) - 2) : mutualInductance(p, q, 0);
    }
    check('field', { ...v, value: l * MICRO, expected: single(v) });
  });
});

describe('single rings solved as conductors', () => {
  it.each(valuesOf('ring_25').map((v) => [v.id, v] as const))(
    'direct-current limit of a solid ring %s',
    (_, v) => {
      const r = input(v, 'a_cm') / 100;
      const a = input(v, 'rho_cm') / 100;
      const s = solveBare(roundCoil(1, r, a, a, 2 * a), COPPER_20, 1);
      // 1e-4 for a thin ring; the operator's curvature error is of order (a/r)².
      check('field', {
        ...v,
        value: (s.reactance / (2 * Math.PI)) * 1e9,
        expected: single(v),
        tolerance: { rel: 5e-4 },
      });
    },
  );

  it.each(valuesOf('loop_hf_').map((v) => [v.id, v] as const))(
    'thin-skin limit near the thin-ring formula %s',
    (_, v) => {
      const r = input(v, 'Dmean_mm') / 2000;
      const a = input(v, 'tube_od_mm') / 2000;
      const s = solveBare(roundCoil(1, r, a, a / 2, 2 * a), COPPER_20, 1e11);
      // The formula keeps the current uniform around; the solution draws it inwards: lower by up to (1.5·a/r)².
      const l = (s.reactance / (2 * Math.PI * 1e11)) * MICRO;
      check('field', { ...v, value: l, expected: single(v), tolerance: { rel: 2.5 * (a / r) ** 2 } });
      expect(l).toBeLessThan(single(v));
    },
  );
});

describe('skin effect', () => {
  it.each(valuesOf('delta_').map((v) => [v.id, v] as const))('skin depth %s', (_, v) => {
    const inputs = v.inputs as Record<string, number>;
    const rho =
      inputs['rho'] ?? (inputs['rho_uohmcm'] === undefined ? COPPER_20 : inputs['rho_uohmcm'] * 1e-8);
    const scale = v.inputs['unit'] === 'cm' ? 100 : 1000;
    check('field', {
      ...v,
      value: skinDepth(rho, input(v, 'f_Hz'), inputs['mur'] ?? 1) * scale,
      expected: single(v),
    });
  });

  it.each(valuesOf('skin_round_').map((v) => [v.id, v] as const))('round wire Rac/Rdc %s', (_, v) => {
    const a = 1e-3;
    const delta = (2 * a) / (Math.SQRT2 * input(v, 'x'));
    const f = COPPER_20 / (Math.PI * MU0 * delta * delta);
    const dc = COPPER_20 / (Math.PI * a * a);
    // Layered solution: a tenth of a per cent beside the table's own digits.
    const tolerance = { abs: Math.max(5e-4, 2e-3 * single(v)) };
    check('field', {
      ...v,
      value: straightTubeImpedance(a, a, COPPER_20, f).re / dc,
      expected: single(v),
      tolerance,
    });
  });

  it.each(valuesOf('tube_').map((v) => [v.id, v] as const))('isolated tube %s', (_, v) => {
    const r = straightTubeImpedance(
      (input(v, 'od_in') * INCH) / 2,
      input(v, 'wall_in') * INCH,
      COPPER_20,
      Math.max(1e-3, input(v, 'f_Hz')),
    ).re;
    check('field', { ...v, value: r * 1000, expected: single(v), tolerance: { rel: 2e-3 } });
  });

  it.each(valuesOf('wall_rule_').map((v) => [v.id, v] as const))('wall against skin depth %s', (_, v) => {
    // A tube of very large radius is a flat wall with its current on one side.
    const f = 1e4;
    const delta = skinDepth(COPPER_20, f);
    const a = 2000 * delta;
    const thick = COPPER_20 / delta / (2 * Math.PI * a);
    const r = straightTubeImpedance(a, input(v, 't_over_delta') * delta, COPPER_20, f).re;
    check('field', { ...v, value: r / thick, expected: single(v), tolerance: { abs: 0.004 } });
  });
});

describe('solid cylinder', () => {
  it.each(
    valuesOf('p_', 'q_')
      .filter((v) => 'd_over_delta' in v.inputs)
      .map((v) => [v.id, v] as const),
  )('flux function %s', (_, v) => {
    const f = cylinderFluxFunctions(input(v, 'd_over_delta'));
    check('field', { ...v, value: v.id.startsWith('p_') ? f.p : f.q, expected: single(v) });
  });

  it('has its largest p where the literature puts it', () => {
    let best = { at: 0, p: 0 };
    for (let x = 3; x <= 4.2; x += 0.002) {
      const { p } = cylinderFluxFunctions(x);
      if (p > best.p) best = { at: x, p };
    }
    for (const v of valuesOf('p_max')) {
      check('field', { ...v, value: v.id === 'p_max' ? best.p : best.at, expected: single(v) });
    }
  });
});

describe('straight leads and loops', () => {
  it('go-and-return pair: exact and logarithmic form', () => {
    for (const v of valuesOf('leads_')) {
      const d = input(v, 'spacing_mm') / 1000;
      const a = input(v, 'od_mm') / 2000;
      const l = v.id === 'leads_exact' ? leadPairInductance(d, a) : thinPairInductance(d, a);
      check('field', { ...v, value: l * MICRO, expected: single(v) });
    }
  });

  it.each(valuesOf('rect_loop', 'square_loop').map((v) => [v.id, v] as const))(
    'rectangular loop %s',
    (_, v) => {
      const x = input(v, 'a_mm') / 1000;
      const y = Number(v.inputs['b_mm'] ?? v.inputs['a_mm']) / 1000;
      const a = input(v, 'od_mm') / 2000;
      const loop = Float64Array.from([0, 0, 0, x, 0, 0, x, y, 0, 0, y, 0, 0, 0, 0]);
      // Grover's form drops terms of order (a/side); the regularised integral keeps them.
      check('field', {
        ...v,
        value: pathInductance([loop], a) * MICRO,
        expected: single(v),
        tolerance: { rel: 1.5e-2 },
      });
    },
  );
});

describe('Medhurst, wound as thirty turns', () => {
  // His coils had 30 to 50 turns; the solution lies within −8 … +2 % of the table there, and the table's
  // own transcriptions differ by up to 5 %. Entries that thirty whole turns can be wound for.
  const entries = valuesOf('medhurst_').filter((v) => {
    const ratio = Number(v.inputs['d_over_pitch']);
    const l = Number(v.inputs['l_over_D']);
    return ratio >= 0.4 && ratio <= 0.8 && l >= 1 && l <= 4;
  });
  it.each(entries.map((v) => [v.id, v] as const))('resistance ratio %s', (_, v) => {
    const turns = 30;
    const pitch = 0.004;
    const a = (input(v, 'd_over_pitch') * pitch) / 2;
    const radius = (turns * pitch) / input(v, 'l_over_D') / 2;
    const f = 1e9;
    const s = solveBare(roundCoil(turns, radius, a, a, pitch), COPPER_20, f);
    const straight = straightTubeImpedance(a, a, COPPER_20, f).re * 2 * Math.PI * radius * turns;
    check('field', { ...v, value: s.resistance / straight, expected: single(v), tolerance: { rel: 0.1 } });
  });
});
