/** Machines and requirements of the demo: invented, checked by the real check, without a blocker. */
import { exampleMachine, exampleRequirement } from '../../lib/schemas/api/examples.ts';
import type { Machine, Requirement } from '../../lib/induction/check/types.ts';

/** Medium-frequency hardening machine of Millrace Driveline. */
export function hardeningMachine(): Machine {
  return { ...exampleMachine(), name: 'Hardening cell 2' };
}

/** High-frequency bench of Kestrelmoor Brazing: series tank straight on the inverter, no transformer. */
export function brazingMachine(): Machine {
  const base = exampleMachine();
  return {
    ...base,
    name: 'Brazing bench A',
    supply: {
      ...base.supply,
      frequencyMin: 80e3,
      frequencyMax: 250e3,
      ratedPower: 10e3,
      voltageLimit: 500,
      currentLimit: 40,
    },
    tank: 'series',
    transformer: {
      ratios: [10, 12, 15, 18],
      fittedTap: 1,
      leakageInductance: 3e-6,
      magnetisingInductance: 0.9e-3,
      windingResistance: 20e-3,
      bankSide: 'primary',
      voltsPerHertzLimit: 0.05,
      apparentPowerLimit: 250e3,
    },
    fixed: {
      inductance: 35e-9,
      inductanceBand: 0.2,
      resistance: 0.3e-3,
      strayCapacitance: null,
      calibration: null,
    },
    bank: {
      kind: 'groups',
      groups: [
        {
          unitCapacitance: 10e-9,
          tolerance: 0.05,
          count: 10,
          positions: 10,
          unitsInSeries: 1,
          fitted: 3,
          unitVoltageLimit: 2500,
          unitCurrentLimit: 40,
          unitReactivePowerLimit: 60e3,
          lossTangent: 4e-4,
        },
      ],
    },
    water: {
      ...base.water,
      inletTemperatureC: 22,
      supplyPressure: 4.5e5,
      returnPressure: 1e5,
      interlockFlow: 1.5e-3 / 60,
    },
    connection: {
      kind: 'quick-change',
      centreDistance: 0.032,
      contactWidth: 0.04,
      contactHeight: 0.045,
      waterPorts: 'through the contact faces, O-ring 8 × 2',
      note: '',
    },
  };
}

/** Shrink-fit cart of Fennick: parallel tank on the secondary side, low frequency. */
export function shrinkMachine(): Machine {
  const base = exampleMachine();
  return {
    ...base,
    name: 'Shrink cart 3',
    supply: {
      ...base.supply,
      frequencyMin: 6e3,
      frequencyMax: 18e3,
      ratedPower: 25e3,
      voltageLimit: 480,
      currentLimit: 90,
    },
    tank: 'parallel',
    transformer: null,
    fixed: {
      inductance: 120e-9,
      inductanceBand: 0.2,
      resistance: 0.8e-3,
      strayCapacitance: null,
      calibration: null,
    },
    bank: {
      kind: 'groups',
      groups: [
        {
          unitCapacitance: 6e-6,
          tolerance: 0.05,
          count: 12,
          positions: 12,
          unitsInSeries: 1,
          fitted: 8,
          unitVoltageLimit: 600,
          unitCurrentLimit: 300,
          unitReactivePowerLimit: 150e3,
          lossTangent: 5e-4,
        },
      ],
    },
    connection: {
      kind: 'blade',
      centreDistance: 0.05,
      contactWidth: 0.06,
      contactHeight: 0.02,
      waterPorts: '3/8 in hose tails',
      note: '',
    },
  };
}

/** Shaft journal, the example of the API. */
export function shaftRequirement(): Requirement {
  return { ...exampleRequirement(), machine: hardeningMachine() };
}

/** A slimmer pin on the same machine. */
export function pinRequirement(): Requirement {
  const base = exampleRequirement();
  return {
    ...base,
    machine: hardeningMachine(),
    part: { ...base.part, outsideDiameter: 0.032, length: 0.1, heatedLength: 0.05 },
    coil: {
      ...base.coil,
      winding: { shape: 'helix', insideDiameter: 0.04, clearance: null, turns: 6, pitch: 0.012 },
      tube: { kind: 'round', outsideDiameter: 0.008, wall: 0.001 },
    },
  };
}

/** Carbide tip on a steel shank, brazed at 720 °C. */
export function tipRequirement(): Requirement {
  const base = exampleRequirement();
  return {
    ...base,
    machine: brazingMachine(),
    part: {
      ...base.part,
      material: { kind: 'library', id: 'steel-4140' },
      outsideDiameter: 0.018,
      length: 0.04,
      heatedLength: 0.02,
      depthWanted: null,
      rotation: false,
      runout: null,
    },
    process: {
      purpose: 'brazing',
      mode: 'single-shot',
      startTemperatureC: 20,
      targetTemperatureC: 720,
      time: 25,
      partsPerHour: null,
      atmosphere: 'air',
      highestSurfaceTemperatureC: 850,
      quench: 'none',
    },
    coil: {
      ...base.coil,
      winding: { shape: 'helix', insideDiameter: 0.026, clearance: null, turns: 4, pitch: 0.0085 },
      tube: { kind: 'round', outsideDiameter: 0.00635, wall: 0.00081 },
      leads: { length: 0.07, spacing: 0.012 },
      handing: { ...base.coil.handing, firstTurnFromFace: 0.07 },
      support: { kind: 'none', count: 0 },
    },
    fixture: {
      ...base.fixture,
      kind: 'nest',
      material: 'machinable glass ceramic',
      datum: 'shank end',
      contact: 'shank below the heated zone',
    },
    acceptance: base.acceptance.map((line) => ({ ...line, testFrequency: 100e3 })),
  };
}

/** Bearing ring to be shrunk on: through heating to 180 °C. */
export function ringRequirement(): Requirement {
  const base = exampleRequirement();
  return {
    ...base,
    machine: shrinkMachine(),
    part: {
      ...base.part,
      material: { kind: 'library', id: 'steel-4140' },
      form: 'ring',
      outsideDiameter: 0.13,
      insideDiameter: 0.085,
      length: 0.04,
      heatedLength: null,
      depthWanted: null,
      rotation: false,
      runout: null,
    },
    process: {
      purpose: 'shrink-fitting',
      mode: 'single-shot',
      startTemperatureC: 20,
      targetTemperatureC: 180,
      time: 60,
      partsPerHour: null,
      atmosphere: 'air',
      highestSurfaceTemperatureC: 240,
      quench: 'none',
    },
    coil: {
      ...base.coil,
      winding: { shape: 'helix', insideDiameter: 0.15, clearance: null, turns: 5, pitch: 0.016 },
      tube: { kind: 'round', outsideDiameter: 0.0127, wall: 0.00124 },
      leads: { length: 0.2, spacing: 0.02 },
      handing: { ...base.coil.handing, firstTurnFromFace: 0.2 },
    },
    fixture: {
      ...base.fixture,
      kind: 'support',
      material: 'three glass-fabric posts',
      datum: 'lower face',
      contact: 'lower face',
    },
    acceptance: base.acceptance.map((line) => ({ ...line, testFrequency: 10e3 })),
  };
}
