/** Material data against the formulas and tables they are taken from (reference/values.json). */
import { describe, expect, it } from 'vitest';
import { relativePermeability, saturationAt } from '../../src/lib/induction/materials/magnetisation.ts';
import { copperResistivity, materialOf } from '../../src/lib/induction/materials/material-of.ts';
import { libraryMaterials } from '../../src/lib/induction/materials/library.ts';
import { skinDepth } from '../../src/lib/induction/constants/physical.ts';
import { check } from './support/published-check.ts';
import { input, single, valuesOf } from './support/reference-values.ts';

const material = (id: string) => materialOf({ kind: 'library', id });
const steel = material('steel-c45');
const stainless = material('stainless-304');

describe('published material values', () => {
  it('resistivity and coefficient of annealed copper', () => {
    const expected: Record<string, number> = {
      rho_cu20: copperResistivity('cu-etp', 20),
      rho_cu60: copperResistivity('cu-etp', 60),
      alpha_cu20: copperResistivity('cu-etp', 120) / copperResistivity('cu-etp', 20) / 100 - 0.01,
    };
    for (const v of valuesOf('rho_cu', 'alpha_cu')) {
      check('materials', { ...v, value: expected[v.id] ?? Number.NaN, expected: single(v) });
    }
  });

  it.each(valuesOf('ec3_cp_').map((v) => [v.id, v] as const))('specific heat of carbon steel %s', (_, v) => {
    check('materials', { ...v, value: steel.specificHeat(input(v, 'T_C')), expected: single(v) });
  });

  it.each(valuesOf('ec3_k_').map((v) => [v.id, v] as const))('conductivity of carbon steel %s', (_, v) => {
    check('materials', { ...v, value: steel.conductivity(input(v, 'T_C')), expected: single(v) });
  });

  it.each(valuesOf('ec3_h_').map((v) => [v.id, v] as const))('enthalpy of carbon steel %s', (_, v) => {
    check('materials', { ...v, value: steel.enthalpy(input(v, 'T_C')) / 1000, expected: single(v) });
  });

  it.each(valuesOf('ec3ss_').map((v) => [v.id, v] as const))(
    'heat and conductivity of stainless steel %s',
    (_, v) => {
      const t = input(v, 'T_C');
      const value = v.id.startsWith('ec3ss_cp') ? stainless.specificHeat(t) : stainless.conductivity(t);
      check('materials', { ...v, value, expected: single(v) });
    },
  );

  it.each(valuesOf('rho304_').map((v) => [v.id, v] as const))('resistivity of 304 %s', (_, v) => {
    check('materials', { ...v, value: stainless.resistivity(input(v, 'T_C')) * 1e8, expected: single(v) });
  });

  it.each(valuesOf('rho_graphite').map((v) => [v.id, v] as const))('resistivity of graphite %s', (_, v) => {
    check('materials', {
      ...v,
      value: material('graphite').resistivity(input(v, 'T_C')) * 1e8,
      expected: single(v),
    });
  });

  it('permeability of saturated steel beside the power law of the literature', () => {
    for (const v of valuesOf('mur_')) {
      check('materials', {
        ...v,
        value: relativePermeability(steel, 20, input(v, 'H_A_per_m')),
        expected: single(v),
      });
    }
  });

  it('surface power density of a field', () => {
    for (const v of valuesOf('pd_')) {
      const rho = input(v, 'rho');
      const p = (input(v, 'Hrms') ** 2 * rho) / skinDepth(rho, input(v, 'f_Hz'), input(v, 'mur'));
      check('materials', { ...v, value: p / 1e4, expected: single(v) });
    }
  });
});

describe('the library', () => {
  it('names source, standing, range and uncertainty for every property', () => {
    for (const m of libraryMaterials()) {
      for (const record of Object.values(m.records)) {
        expect(record.source.length, m.id).toBeGreaterThan(5);
        expect(record.uncertainty, m.id).toBeGreaterThanOrEqual(0);
        if (record.standing === 'memory')
          expect(record.source.toLowerCase(), m.id).toMatch(/memory|permeability/);
      }
    }
  });

  it('stays positive and finite from −50 to 3000 °C, with enthalpy rising', () => {
    for (const m of libraryMaterials()) {
      let before = Number.NEGATIVE_INFINITY;
      for (let t = -50; t <= 3000; t += 25) {
        for (const x of [m.resistivity(t), m.specificHeat(t), m.conductivity(t)]) {
          expect(x, `${m.id} at ${t}`).toBeGreaterThan(0);
          expect(Number.isFinite(x)).toBe(true);
        }
        expect(m.enthalpy(t)).toBeGreaterThan(before);
        before = m.enthalpy(t);
      }
    }
  });

  it('loses magnetism at the Curie point', () => {
    const law = steel.magnetisation;
    if (law === null) throw new Error('steel is magnetic');
    expect(saturationAt(law, 20)).toBe(law.saturation);
    expect(saturationAt(law, law.curieC)).toBe(0);
    expect(relativePermeability(steel, law.curieC + 1, 1000)).toBe(1);
    expect(relativePermeability(steel, 20, 0)).toBe(law.initialPermeability);
  });

  it('refuses an unknown id and impossible own values with the field they are about', () => {
    expect(() => material('unobtainium')).toThrow(/no material/);
    const own = {
      name: 'x',
      resistivity20: 1e-7,
      resistivityHot: Number.NaN,
      relativePermeability: 1,
      saturationFluxDensity: null,
      curieTemperatureC: null,
      density: 7800,
      specificHeat: 500,
      thermalConductivity: 30,
      emissivity: null,
      solidusC: null,
    };
    expect(() => materialOf({ kind: 'own', own })).toThrow(/must be a number/);
    expect(() => materialOf({ kind: 'own', own: { ...own, resistivityHot: 1e-6, density: -1 } })).toThrow(
      /Density/,
    );
  });
});
