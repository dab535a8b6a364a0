/**
 * Example machine and requirement (invented): 20 kHz, 50 kW hardening of a 40 mm C45 shaft in a five-turn helix. Used
 * by the API description, the demo and tests; the example has no blocker.
 */
import type { AcceptanceLine, Machine, Requirement } from './types.ts';

/** A 50 kW parallel-tank machine with a tapped output transformer and its bank on the primary side. */
export function exampleMachine(): Machine {
  return {
    name: 'Hardening cell 2, 50 kW',
    supply: {
      frequencyMin: 15e3,
      frequencyMax: 30e3,
      ratedPower: 50e3,
      voltageLimit: 500,
      currentLimit: 160,
      dcVoltage: null,
      devicePeakVoltage: null,
      chokeInductance: null,
      chokeSaturationCurrent: null,
    },
    tank: 'parallel',
    transformer: {
      ratios: [3, 4, 5, 6],
      fittedTap: 1,
      leakageInductance: 0.8e-6,
      magnetisingInductance: 0.4e-3,
      windingResistance: 3e-3,
      bankSide: 'primary',
      voltsPerHertzLimit: 0.05,
      apparentPowerLimit: 500e3,
    },
    fixed: {
      inductance: 60e-9,
      inductanceBand: 0.15,
      resistance: 0.4e-3,
      strayCapacitance: 5e-9,
      calibration: null,
    },
    bank: {
      kind: 'groups',
      groups: [
        {
          unitCapacitance: 1.5e-6,
          tolerance: 0.05,
          count: 8,
          positions: 8,
          unitsInSeries: 1,
          fitted: 5,
          unitVoltageLimit: 600,
          unitCurrentLimit: 150,
          unitReactivePowerLimit: 80e3,
          lossTangent: 5e-4,
        },
      ],
    },
    water: {
      inletTemperatureC: 25,
      supplyPressure: 4e5,
      returnPressure: 1e5,
      flow: 7e-3 / 60,
      outletLimitC: 50,
      interlockFlow: 4e-3 / 60,
    },
    connection: {
      kind: 'plate',
      centreDistance: 0.04,
      contactWidth: 0.05,
      contactHeight: 0.06,
      waterPorts: 'two hose tails for 10 mm hose',
      note: '',
    },
  };
}

function inductanceLine(): AcceptanceLine {
  return {
    id: 'inductance',
    kind: 'inductance',
    label: 'Inductance of the coil alone',
    basis: 'computed',
    nominal: null,
    low: null,
    high: null,
    unit: 'H',
    testFrequency: 20e3,
    temperatureC: 20,
    measuringPlane: 'contact faces',
    leadState: 'leads as fitted, no part in the coil',
    holdTime: null,
    differentialPressure: null,
    note: '',
  };
}

/** Shaft of 40 mm C45, 2 mm deep at 880 °C, five turns of 10 × 1 mm tube at 48 mm opening. */
export function exampleRequirement(): Requirement {
  return {
    machine: exampleMachine(),
    part: {
      material: { kind: 'library', id: 'steel-c45' },
      form: 'cylinder',
      outsideDiameter: 0.04,
      insideDiameter: 0,
      length: 0.12,
      diameterTolerance: 0.05e-3,
      weighedMass: null,
      heatedLength: 0.06,
      depthWanted: 2.5e-3,
      axialOffset: 0,
      runout: 0.2e-3,
      rotation: true,
    },
    process: {
      purpose: 'hardening',
      mode: 'single-shot',
      startTemperatureC: 20,
      targetTemperatureC: 880,
      time: 6,
      partsPerHour: null,
      atmosphere: 'air',
      highestSurfaceTemperatureC: 980,
      quench: 'separate',
    },
    coil: {
      winding: { shape: 'helix', insideDiameter: 0.048, clearance: null, turns: 5, pitch: 0.013 },
      tube: { kind: 'round', outsideDiameter: 0.01, wall: 0.001 },
      copperGrade: 'cu-etp',
      copperTemperatureC: null,
      leads: { length: 0.1, spacing: 0.016 },
      handing: {
        windingDirection: 'right',
        leadExit: 'radial',
        leadAngleDeg: 0,
        upEnd: 'lead-end',
        firstTurnFromFace: 0.1,
      },
      diameterTolerance: 0.5e-3,
      pitchTolerance: 0.3e-3,
      support: { kind: 'studs', count: 3 },
      centreTap: false,
      insulation: { kind: 'sleeve', thickness: 0.5e-3 },
      waterCircuits: 1,
    },
    fixture: {
      kind: 'rotating-centre',
      material: 'silicon nitride tips in a steel body',
      datum: 'shaft centres',
      contact: 'centres at both ends',
      contactTemperatureC: 200,
      metalParts: [],
      operatorDistance: 1.5,
      acceptance: ['Runout of the nest below 0.1 mm'],
    },
    acceptance: [inductanceLine()],
    designResponsibility: 'to-checked-figures',
  };
}
