import { describe, expect, it } from 'vitest';
import { exampleRequirement } from '../api/examples.ts';
import type { Requirement } from '../../induction/check/types.ts';
import { readRequirement, readCommercial } from './requirement-form.ts';
import { requirementValues, newRequestValues } from './requirement-texts.ts';

/** Compares with the digits a form field keeps. */
function close(value: unknown): unknown {
  return JSON.parse(
    JSON.stringify(value, (_key, inner: unknown) =>
      typeof inner === 'number' ? Number(inner.toPrecision(7)) : inner,
    ),
  );
}

describe('the form of a requirement', () => {
  for (const unitSet of ['metric', 'inch'] as const) {
    it(`gives back the requirement it was filled from, in ${unitSet} units`, () => {
      const requirement = exampleRequirement();
      const read = readRequirement(requirementValues(requirement, unitSet), unitSet);
      expect(read.errors).toEqual({});
      expect(read.missing).toEqual([]);
      expect(close(read.requirement)).toEqual(close(requirement));
    });
  }

  it('keeps every shape of winding, own materials, metal parts and a list of totals', () => {
    const windings: Requirement['coil']['winding'][] = [
      { shape: 'single-turn', insideDiameter: null, clearance: 0.003 },
      { shape: 'pancake', insideDiameter: 0.02, turns: 4, pitch: 0.012, faceGap: 0.004 },
      { shape: 'conical', insideDiameter: 0.04, endInsideDiameter: 0.06, turns: 4, pitch: 0.013 },
      { shape: 'stepped', insideDiameters: [0.048, 0.05, 0.052], pitch: 0.013 },
      { shape: 'bore', outsideDiameter: 0.03, clearance: null, turns: null, pitch: 0.012 },
      {
        shape: 'racetrack',
        insideLength: 0.1,
        insideWidth: 0.04,
        cornerRadius: 0.02,
        turns: 3,
        pitch: 0.013,
      },
      { shape: 'hairpin', length: 0.2, legGap: 0.03, turns: 1, pitch: 0.012 },
      {
        shape: 'channel',
        insideLength: 0.2,
        insideWidth: 0.03,
        crossingHeight: 0.05,
        turns: 1,
        pitch: 0.012,
      },
      { shape: 'drawing', note: 'as sketched' },
    ];
    for (const winding of windings) {
      const requirement = exampleRequirement();
      requirement.coil.winding = winding;
      requirement.machine.bank = {
        kind: 'totals',
        totals: [
          {
            label: 'position 1',
            capacitance: 2e-6,
            tolerance: 0.05,
            fitted: true,
            voltageLimit: 700,
            currentLimit: null,
            reactivePowerLimit: null,
          },
        ],
      };
      requirement.machine.transformer = null;
      requirement.machine.connection = null;
      requirement.coil.leads = null;
      requirement.part.material = {
        kind: 'own',
        own: {
          name: 'sintered alloy',
          resistivity20: 4.5e-7,
          resistivityHot: null,
          relativePermeability: 1,
          saturationFluxDensity: null,
          curieTemperatureC: null,
          density: 14500,
          specificHeat: 240,
          thermalConductivity: 80,
          emissivity: 0.4,
          solidusC: null,
        },
      };
      requirement.fixture.metalParts = [
        { name: 'clamp', r: 0.1, z: -0.05, size: 0.03, material: { kind: 'library', id: 'stainless-304' } },
      ];
      const read = readRequirement(requirementValues(requirement, 'metric'), 'metric');
      expect([winding.shape, read.errors, read.missing]).toEqual([winding.shape, {}, []]);
      expect(close(read.requirement)).toEqual(close(requirement));
    }
  });

  it('takes typed units over the unit set', () => {
    const values = requirementValues(exampleRequirement(), 'metric');
    values['coil.tube.outsideDiameter'] = '3/8 in';
    values['machine.water.supplyPressure'] = '60 psi';
    values['part.outsideDiameter'] = '9,5 mm';
    values['process.targetTemperatureC'] = '1616 °F';
    const { requirement } = readRequirement(values, 'metric');
    expect(requirement?.coil.tube).toMatchObject({ outsideDiameter: expect.closeTo(0.009525, 9) });
    expect(requirement?.machine.water.supplyPressure).toBeCloseTo(413685.4, 0);
    expect(requirement?.part.outsideDiameter).toBeCloseTo(0.0095, 9);
    expect(requirement?.process.targetTemperatureC).toBeCloseTo(880, 6);
  });

  it('says which field cannot be read and gives no requirement then', () => {
    const values = requirementValues(exampleRequirement(), 'metric');
    values['coil.winding.pitch'] = '1,000 mm';
    values['coil.tube.wall'] = '1 bar';
    values['part.length'] = '';
    const read = readRequirement(values, 'metric');
    expect(Object.keys(read.errors).sort()).toEqual(['coil.tube.wall', 'coil.winding.pitch']);
    expect(read.missing).toEqual(['part.length']);
    expect(read.requirement).toBeNull();
  });

  it('refuses values out of any range by the field they were typed in', () => {
    const values = requirementValues(exampleRequirement(), 'metric');
    values['coil.winding.turns'] = '100000';
    const read = readRequirement(values, 'metric');
    expect(read.errors['coil.winding.turns']).toMatch(/Turns must be a number/);
  });

  it('asks for a lead spacing where only the lead length is given', () => {
    const values = requirementValues(exampleRequirement(), 'metric');
    values['coil.leads.spacing'] = '';
    expect(readRequirement(values, 'metric').missing).toEqual(['coil.leads.spacing']);
  });

  it('refuses a fitted ratio that is not one of the taps', () => {
    const values = requirementValues(exampleRequirement(), 'metric');
    values['machine.transformer.fitted'] = '7';
    expect(readRequirement(values, 'metric').errors).toHaveProperty(['machine.transformer.fitted']);
  });

  it('does not touch the prototype of objects, whatever the names', () => {
    readRequirement({ '__proto__.polluted': 'yes', 'constructor.prototype.polluted': 'yes' }, 'metric');
    expect(({} as Record<string, unknown>)['polluted']).toBeUndefined();
  });
});

describe('the commercial form', () => {
  const filled = () => ({
    ...newRequestValues(),
    'commercial.closesOn': '2027-03-01',
    'commercial.deliveryPlace': 'Works 2, gate B',
    'commercial.budget': '1,250.50',
  });

  it('reads amounts to minor units and shares to basis points', () => {
    expect(readCommercial(filled(), 'metric').commercial).toEqual({
      quantity: 1,
      firstArticle: false,
      needBy: null,
      deliveryTerm: 'DAP',
      deliveryPlace: 'Works 2, gate B',
      currency: 'EUR',
      poNumber: '',
      costCentre: '',
      closesOn: '2027-03-01',
      freeIssue: '',
      milestoneLimits: { drawingMaxBp: 2000, deliveryMinBp: 2000 },
      inspectionDays: 10,
      budget: 125050,
    });
  });

  it('refuses a need-by date before the closing of bids', () => {
    const read = readCommercial({ ...filled(), 'commercial.needBy': '2027-02-28' }, 'metric');
    expect(read.commercial).toBeNull();
    expect(read.errors).toHaveProperty(['commercial.needBy']);
  });

  it('refuses a day that the calendar does not have', () => {
    expect(
      readCommercial({ ...filled(), 'commercial.closesOn': '2027-02-30' }, 'metric').errors,
    ).toHaveProperty(['commercial.closesOn']);
  });
});
