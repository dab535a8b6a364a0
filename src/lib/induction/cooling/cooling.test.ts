import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { boreOf } from './bore.ts';
import { coiledFriction, itoCritical, whiteLaminar } from './friction.ts';
import {
  circuitsAdvised,
  flowAtPressure,
  flowThrough,
  temperatureRise,
  wallTemperature,
  type Passage,
} from './passage.ts';
import { water } from './water.ts';

const passage: Passage = {
  length: 1.6,
  hydraulicDiameter: 0.00473,
  area: (Math.PI * 0.00473 ** 2) / 4,
  perimeter: Math.PI * 0.00473,
  coilDiameter: 0.06,
};

describe('water in a coil', () => {
  it('has a friction factor that never falls below the straight tube', () => {
    fc.assert(
      fc.property(
        fc.double({ min: 100, max: 1e5, noNaN: true }),
        fc.double({ min: 0.005, max: 0.2, noNaN: true }),
        (re, ratio) => {
          const straight = re < 2300 ? 64 / re : 0;
          expect(coiledFriction(re, ratio).factor).toBeGreaterThanOrEqual(straight * (1 - 1e-9));
        },
      ),
    );
  });

  it('turns turbulent later in a coil than in a straight tube', () => {
    expect(coiledFriction(5000, 0).regime).toBe('turbulent');
    expect(coiledFriction(5000, 0.1).regime).toBe('laminar');
    expect(coiledFriction(itoCritical(0.1) * 1.01, 0.1).regime).toBe('turbulent');
    expect(whiteLaminar(100, 1e-3)).toBeCloseTo(0.64, 9);
  });

  it('finds the flow whose drop is the pressure', () => {
    for (const pressure of [2e4, 1e5, 4e5]) {
      const found = flowAtPressure(passage, pressure, 30);
      expect(flowThrough(passage, found.flow, 30).pressureDrop / pressure).toBeCloseTo(1, 1);
    }
    expect(flowAtPressure(passage, 0, 30).flow).toBe(0);
  });

  it('flows more at more pressure and through more area', () => {
    fc.assert(
      fc.property(fc.double({ min: 1e3, max: 1e6, noNaN: true }), (pressure) => {
        const base = flowAtPressure(passage, pressure, 30).flow;
        expect(flowAtPressure(passage, pressure * 2, 30).flow).toBeGreaterThanOrEqual(base);
        expect(
          flowAtPressure({ ...passage, length: passage.length / 2 }, pressure, 30).flow,
        ).toBeGreaterThanOrEqual(base);
      }),
    );
  });

  it('carries the heat away: rise times heat capacity is the heat', () => {
    const { rise, meanC } = temperatureRise(1500, 1.08e-3 / 60, 25);
    const w = water(meanC);
    expect(rise * w.density * w.specificHeat * (1.08e-3 / 60)).toBeCloseTo(1500, 3);
    expect(rise).toBeCloseTo(20, 0);
    expect(temperatureRise(1500, 0, 25).rise).toBe(Infinity);
  });

  it('has a wall hotter than the water, and hotter still where one turn takes more than its share', () => {
    const state = flowThrough(passage, 1.08e-3 / 60, 35);
    const even = wallTemperature(passage, state, 1500, 45, 1);
    expect(even).toBeGreaterThan(45);
    expect(wallTemperature(passage, state, 1500, 45, 1.5)).toBeCloseTo(45 + (even - 45) * 1.5, 9);
  });

  it('advises as many circuits as keep the rise in its limit', () => {
    const of = (circuits: number) => ({ ...passage, length: 12 / circuits });
    const advised = circuitsAdvised(of, 12e3, 3e5, 25, 25, 8);
    expect(advised).toBeGreaterThan(1);
    const rise = (n: number) => temperatureRise(12e3, flowAtPressure(of(n), 3e5, 37.5).flow * n, 25).rise;
    expect(rise(advised)).toBeLessThanOrEqual(25);
    expect(rise(advised - 1)).toBeGreaterThan(25);
  });

  it('measures the bore of round, square and rectangular tube, and finds none in a solid one', () => {
    expect(boreOf({ kind: 'round', outsideDiameter: 0.01, wall: 0.001 })?.hydraulicDiameter).toBeCloseTo(
      0.008,
      12,
    );
    const square = boreOf({ kind: 'square', side: 0.01, wall: 0.001, cornerRadius: 0.001 });
    expect(square).toMatchObject({ area: 6.4e-5, perimeter: 0.032 });
    expect(
      boreOf({ kind: 'rectangular', axialWidth: 0.02, radialHeight: 0.01, wall: 0.005, cornerRadius: 0 }),
    ).toBeNull();
    expect(boreOf({ kind: 'round', outsideDiameter: 0.01, wall: 0.005 })).toBeNull();
  });
});
