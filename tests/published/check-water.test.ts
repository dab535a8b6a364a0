/**
 * Water properties, friction and heat transfer in coiled tube against IAPWS, published correlations and a solved case
 * (families water, ito, gniel, db, colebrook, curved, heat of reference/values.json; I of finite-elements.json).
 */
import { describe, expect, it } from 'vitest';
import {
  colebrook,
  copperRoughness,
  itoCritical,
  itoTurbulent,
  moriNakayamaTurbulent,
  straightFriction,
} from '../../src/lib/induction/cooling/friction.ts';
import { dittusBoelter, gnielinski } from '../../src/lib/induction/cooling/heat-transfer.ts';
import { flowThrough, temperatureRise } from '../../src/lib/induction/cooling/passage.ts';
import { water } from '../../src/lib/induction/cooling/water.ts';
import { check, solvedElsewhere } from './support/published-check.ts';
import { input, single, solvedCase, valuesOf, type ReferenceValue } from './support/reference-values.ts';

const subject = 'check-water';
const compare = (v: ReferenceValue, value: number, expected = single(v), id = v.id) =>
  check(subject, { ...v, id, value, expected });

describe('cooling water', () => {
  it('has the properties of IAPWS at 2 bar', () => {
    const names = ['density', 'specificHeat', 'viscosity', 'conductivity', 'prandtl'] as const;
    for (const v of valuesOf('water_')) {
      const w = water(input(v, 'T_C'));
      names.forEach((name, i) => compare(v, w[name], Number((v.expected as number[])[i]), `${v.id}-${name}`));
    }
    expect(valuesOf('water_')).toHaveLength(6);
  });

  it('has the critical Reynolds numbers of Ito 1959', () => {
    for (const v of valuesOf('ito_')) compare(v, itoCritical(1 / input(v, 'Dc_over_di')));
    expect(valuesOf('ito_').length).toBeGreaterThan(5);
  });

  it('has the friction factors of Colebrook and Mori–Nakayama', () => {
    for (const v of valuesOf('colebrook')) compare(v, colebrook(input(v, 'Re'), input(v, 'eD')));
    for (const v of valuesOf('curved'))
      compare(v, moriNakayamaTurbulent(input(v, 'Re'), input(v, 'di') / input(v, 'Dc')));
    expect(valuesOf('colebrook', 'curved')).toHaveLength(2);
  });

  it('has the Nusselt numbers of Gnielinski and Dittus–Boelter', () => {
    for (const v of valuesOf('gniel')) compare(v, gnielinski(input(v, 'Re'), input(v, 'Pr'), input(v, 'fD')));
    for (const v of valuesOf('db')) compare(v, dittusBoelter(input(v, 'Re'), input(v, 'Pr')));
    expect(valuesOf('gniel', 'db')).toHaveLength(2);
  });

  it('carries 0.0694 kW per L/min and kelvin', () => {
    for (const v of valuesOf('heat_balance')) {
      const { rise } = temperatureRise(1000, 1e-3 / 60, input(v, 'T_mean_C') - 7.2);
      compare(v, 1 / rise);
    }
    expect(valuesOf('heat_balance')).toHaveLength(1);
  });
});

describe('solved water passage (I-04)', () => {
  const one = solvedCase('I-04');
  const diameter = input(one, 'tube_inner_diameter_m');
  const passage = {
    length: input(one, 'tube_length_m'),
    hydraulicDiameter: diameter,
    area: (Math.PI * diameter ** 2) / 4,
    perimeter: Math.PI * diameter,
    coilDiameter: input(one, 'coil_centreline_diameter_m'),
    roughness: input(one, 'roughness_m'),
  };
  const inlet = input(one, 'water_inlet_temperature_C');
  const flow = input(one, 'volume_flow_m3_per_s');
  const coiled = flowThrough(passage, flow, inlet);
  const straight = flowThrough({ ...passage, coilDiameter: null }, flow, inlet);
  const compareTo = (key: string, value: number, rel: number) =>
    check(subject, {
      id: `I-04-${key}`,
      quantity: key,
      source: `${one.method}, ${one.tool}`,
      standing: solvedElsewhere,
      value,
      expected: Number(one.expected[key]),
      tolerance: { rel },
    });

  it('agrees in velocity, Reynolds number and straight-tube drop', () => {
    compareTo('velocity_m_per_s', coiled.velocity, 1e-6);
    compareTo('reynolds_number', coiled.reynolds, 2e-3);
    compareTo(
      'darcy_friction_factor',
      straightFriction(coiled.reynolds, input(one, 'roughness_m') / diameter),
      1e-3,
    );
    compareTo('pressure_drop_straight_Pa', straight.pressureDrop, 2e-3);
    expect(copperRoughness).toBe(input(one, 'roughness_m'));
  });

  it('agrees within 5 % with the named correlation for the coiled tube (Ito), and is within its band of the others', () => {
    compareTo('critical_reynolds_ito_1959', itoCritical(diameter / passage.coilDiameter), 1e-6);
    compareTo(
      'friction_factor_helical_ito',
      itoTurbulent(coiled.reynolds, diameter / passage.coilDiameter),
      2e-3,
    );
    compareTo('pressure_drop_helical_ito_Pa', coiled.pressureDrop, 5e-3);
    for (const key of ['pressure_drop_helical_mishra_gupta_Pa', 'pressure_drop_helical_white_turbulent_Pa']) {
      const other = Number(one.expected[key]);
      expect(Math.abs(other / coiled.pressureDrop - 1), key).toBeLessThanOrEqual(coiled.friction.band + 0.01);
    }
  });

  it('agrees in the temperature rise', () => {
    const { rise } = temperatureRise(input(one, 'heat_load_W'), flow, inlet);
    // The case takes properties at the inlet; ours at the mean, 0.4 % lighter water.
    compareTo('temperature_rise_K_enthalpy', rise, 0.008);
    expect(rise).toBeGreaterThan(28);
  });
});
