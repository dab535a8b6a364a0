/**
 * Where each published value of reference/values.json is checked, or why it is not: every entry must be
 * in this table. "check" = tests of tank, cooling, tube stock and exposure (tests/published/check-*).
 */
import { describe, expect, it } from 'vitest';
import { referenceValues, solvedCases } from './support/reference-values.ts';

const places: [prefix: string, where: 'formulas' | 'materials' | 'check' | 'not applicable', why: string][] =
  [
    ['nagaoka_', 'formulas', 'ring kernel integrated over a current sheet'],
    ['rosa_B_', 'formulas', 'rings less current sheet'],
    [
      'rosa_A_',
      'not applicable',
      'the closed form itself; no rings depend on it, B is checked with A inserted',
    ],
    ['maxwell_', 'formulas', 'ring kernel'],
    ['grover_f_', 'formulas', 'ring kernel'],
    ['ring_25', 'formulas', 'solid ring solved near direct current'],
    ['loop_hf_', 'formulas', 'ring solved at thin skin'],
    ['sheet_', 'formulas', 'ring kernel integrated over a current sheet'],
    [
      'wheeler_',
      'not applicable',
      'an approximation (1 %) the product does not use; its target is checked by sheet_',
    ],
    [
      'lundin_',
      'not applicable',
      'an approximation the product does not use; its target is checked by nagaoka_',
    ],
    ['spiral_ring_', 'formulas', 'flat spiral as rings'],
    [
      'gmd_',
      'not applicable',
      'the solution resolves the section; no mean distance of solid sections is used',
    ],
    ['leads_', 'formulas', 'go-and-return pair'],
    ['rect_loop', 'formulas', 'straight segments'],
    ['square_loop', 'formulas', 'straight segments'],
    ['rho_cu', 'materials', ''],
    ['alpha_cu', 'materials', ''],
    ['delta_', 'formulas', 'skin depth'],
    ['skin_round_', 'formulas', 'straight rod'],
    ['tube_', 'formulas', 'straight tube'],
    ['wall_rule_', 'formulas', 'tube of very large radius'],
    [
      'medhurst_',
      'formulas',
      'as thirty turns; only d/p 0.4–0.8 and l/D 1–4 (thirty turns cannot be wound shorter, wider spacings show no proximity)',
    ],
    ['p_', 'formulas', 'flux functions'],
    ['q_', 'formulas', 'flux functions'],
    [
      'eta_limit_',
      'not applicable',
      'limit of an infinitely long, touching coil; the product solves the real one',
    ],
    [
      'agarwal_',
      'not applicable',
      'step magnetisation law; the product uses a smooth one, checked by case D-T2',
    ],
    ['mur_', 'materials', ''],
    ['pd_', 'materials', 'surface power density'],
    ['ec3', 'materials', ''],
    ['rho304', 'materials', ''],
    ['rho_graphite', 'materials', ''],
    ['f_', 'check', 'resonance'],
    ['Rp_', 'check', 'resonance'],
    ['Q', 'check', 'resonance'],
    ['pushpull_', 'check', 'push-pull stage'],
    ['water_', 'check', 'cooling'],
    ['ito_', 'check', 'cooling'],
    ['gniel', 'check', 'cooling'],
    ['db', 'check', 'cooling'],
    ['colebrook', 'check', 'cooling'],
    ['curved_', 'check', 'cooling'],
    ['heat_balance', 'check', 'cooling'],
    ['b280_', 'check', 'tube stock'],
    ['b88', 'check', 'tube stock'],
    ['barlow_', 'check', 'pressure'],
    ['braze_', 'check', 'fillers'],
    ['icnirp', 'check', 'exposure'],
    ['eu2013', 'check', 'exposure'],
    ['cispr', 'check', 'emission limits: named, not computed'],
  ];

/** Solved cases by family; H and I are circuits and pipe flow. */
const families: Record<string, 'field' | 'heating' | 'check'> = {
  A3: 'field',
  B: 'field',
  C: 'field',
  D: 'field',
  E1: 'field',
  E2: 'field',
  F: 'heating',
  G: 'field',
  H: 'check',
  I: 'check',
};

describe('coverage of the reference', () => {
  it('places every published value', () => {
    const lost = referenceValues.filter((v) => !places.some(([prefix]) => v.id.startsWith(prefix)));
    expect(lost.map((v) => v.id)).toEqual([]);
  });

  it('gives a reason for each that does not apply', () => {
    for (const [prefix, where, why] of places) {
      if (where === 'not applicable') expect(why.length, prefix).toBeGreaterThan(20);
      expect(
        referenceValues.some((v) => v.id.startsWith(prefix)),
        `${prefix} matches nothing`,
      ).toBe(true);
    }
  });

  it('places every solved case', () => {
    expect(solvedCases.filter((c) => families[c.family] === undefined).map((c) => c.id)).toEqual([]);
  });
});
