import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { materialOf } from '../materials/material-of.ts';
import { allowedInductanceBand, proposedAcceptance } from './acceptance.ts';
import { chebyshevPoints, coilModel } from './coil-model.ts';
import { figure } from './figure.ts';
import { baseContext, changed } from './findings/case-context.ts';
import {
  coldShare,
  energyToTarget,
  heatingFigures,
  meanPartPower,
  surfaceLossDensity,
} from './heating-figures.ts';

describe('figures', () => {
  const effect = (name: string, change: number) => ({
    name,
    change,
    variation: { value: 1, unit: 'm' as const },
  });

  it('add effects in quadrature and name the three largest', () => {
    const one = figure(10, 'm', 'x', [
      effect('a', 3),
      effect('b', -4),
      effect('c', 0.1),
      effect('d', 0.2),
      effect('e', Number.NaN),
    ]);
    expect(one.high - one.value).toBeCloseTo(Math.hypot(3, 4, 0.1, 0.2), 12);
    expect(one.contributors.map((c) => [c.name, c.effect])).toEqual([
      ['b', -0.4],
      ['a', 0.3],
      ['d', 0.02],
    ]);
  });

  it('keep bands inside physical ends', () => {
    const share = figure(0.95, '1', 'x', [effect('a', 0.2)], { least: 0, most: 1 });
    expect([share.low, share.high]).toEqual([0.75, 1]);
  });
});

describe('impedance model over frequency', () => {
  it('reproduces power laws exactly, between the points too', () => {
    fc.assert(
      fc.property(
        fc.double({ min: -0.3, max: 0.3, noNaN: true }),
        fc.double({ min: 0.1, max: 0.9, noNaN: true }),
        (a, b) => {
          const fs = chebyshevPoints(1e4, 6e4, 4);
          const model = coilModel(
            fs,
            [1],
            fs.map((f) => [{ inductance: f ** a, coilResistance: f ** b, loadResistance: f ** (b / 2) }]),
          );
          const p = model.at(23_456, 99);
          expect(p.inductance / 23_456 ** a).toBeCloseTo(1, 9);
          expect(p.coilResistance / 23_456 ** b).toBeCloseTo(1, 9);
        },
      ),
    );
  });
});

describe('heating balance', () => {
  const { requirement } = baseContext();
  const steel = materialOf({ kind: 'library', id: 'steel-c45' });
  const through = { ...requirement.part, depthWanted: null, heatedLength: null };

  it('is mass times enthalpy for through heating', () => {
    const { energy, massHeated } = energyToTarget(through, requirement.process, steel, 6);
    expect(massHeated).toBeCloseTo((Math.PI / 4) * 0.04 ** 2 * 0.12 * 7850, 9);
    // Enthalpy from 20 °C to 900 °C 632.1 kJ/kg (EN 1993-1-2 integrated; practice table), at 880 °C 13 kJ/kg less.
    expect(energy / massHeated / 1e3).toBeGreaterThan(610);
    expect(energy / massHeated / 1e3).toBeLessThan(632);
  });

  it('takes more energy the longer the heat runs into the core, never more than through heating', () => {
    const part = { ...requirement.part, depthWanted: 2e-3 };
    const [short, long, endless] = [1, 10, 1e5].map(
      (t) => energyToTarget(part, requirement.process, steel, t).energy,
    );
    const whole = energyToTarget({ ...part, depthWanted: null }, requirement.process, steel, 1).energy;
    expect(short).toBeLessThan(long ?? 0);
    expect(endless).toBeLessThanOrEqual(whole * (1 + 1e-6));
  });

  it('radiates as in the practice table: 6.0 W/cm² at 800 °C and emissivity 0.8', () => {
    // Table of radiation alone: take convection off by vacuum.
    expect(surfaceLossDensity(800, 0.8, 'vacuum') / 1e4).toBeCloseTo(6.0, 1);
    expect(surfaceLossDensity(1000, 0.8, 'vacuum') / 1e4).toBeCloseTo(11.9, 1);
    expect(surfaceLossDensity(800, 0.8, 'air')).toBeGreaterThan(surfaceLossDensity(800, 0.8, 'vacuum'));
  });

  it('weighs cold and hot power by the energy that goes in below the Curie point', () => {
    expect(coldShare(requirement.process, materialOf({ kind: 'library', id: 'stainless-304' }))).toBe(0.5);
    const share = coldShare(requirement.process, steel);
    expect(share).toBeGreaterThan(0.6);
    expect(share).toBeLessThan(0.95);
    expect(meanPartPower({ cold: 10, hot: 10 }, share)).toBeCloseTo(10, 12);
  });

  it('has no time where the power does not cover the surface loss', () => {
    const power = { ...figure(1, 'W', 'x') };
    expect(
      heatingFigures(through, requirement.process, steel, { cold: power, hot: power }).timeAtDeliverablePower,
    ).toBeNull();
  });
});

describe('proposed acceptance', () => {
  it('gives an inductance band inside what the supply’s range allows', () => {
    const context = baseContext();
    const allowed = allowedInductanceBand(context);
    const inductance = proposedAcceptance(context).find((line) => line.kind === 'inductance');
    expect(inductance?.nominal).toBeCloseTo(context.bareAtTest?.inductance.value ?? 0, 12);
    expect((inductance?.high ?? 0) / (inductance?.nominal ?? 1) - 1).toBeLessThanOrEqual(
      Math.max(0.02, allowed?.up ?? 0),
    );
    expect(inductance?.testFrequency).toBe(20e3);
  });

  it('allows less where the range is narrower', () => {
    const context = baseContext();
    const f = Math.min(
      ...[context.ladder.find((row) => row.fitted)].flatMap((row) =>
        row ? [row.cold.frequency.value, row.hot.frequency.value] : [],
      ),
    );
    const narrow = changed(context, { 'models.assumed.frequencyMin': f * 0.99 });
    expect(allowedInductanceBand(narrow)?.up).toBeLessThan(allowedInductanceBand(context)?.up ?? 0);
    expect(allowedInductanceBand(narrow)?.up).toBeLessThan(0.05);
  });
});
