/** Impedance of a coil alone or with a part over a list of frequencies: what an LCR meter is compared with. */
import { solveImpedance } from '../field/solve-impedance.ts';
import { InductionInputError } from '../input-error.ts';
import { methodVersion } from '../version.ts';
import { CheckStoppedError } from './solver.ts';
import type { Coil, ImpedanceAnswer, MaterialChoice, SolverSetting, Workpiece } from './types.ts';

/** Resistivity in Ω·m and constant relative permeability. */
export interface PlainMaterial {
  kind: 'plain';
  resistivity: number;
  relativePermeability: number;
}

export interface SweepPart extends Pick<
  Workpiece,
  'form' | 'outsideDiameter' | 'insideDiameter' | 'length' | 'axialOffset'
> {
  material: MaterialChoice | PlainMaterial;
  /** Of the whole part; has no meaning for a plain material. */
  temperatureC: number;
}

export interface ImpedanceSweep {
  coil: Coil;
  part: SweepPart | null;
  includeLeads: boolean;
  /** Hz */
  frequencies: number[];
  /** A rms (1): decides the permeability of saturating steel. */
  current?: number | undefined;
  setting?: SolverSetting | undefined;
}

export interface SweepImpedance extends ImpedanceAnswer {
  q: number;
}

export interface SweepResult {
  methodVersion: string;
  results: { frequency: number; bare: SweepImpedance; loaded: SweepImpedance | null }[];
}

export type SweepAnswer = { ok: true; result: SweepResult } | { ok: false; field: string; message: string };

/**
 * Bare and loaded impedance at each frequency.
 *
 * @returns figures for 1 A rms in Ω and H, or the field that cannot be computed with a message; never throws for input
 * @throws CheckStoppedError when `shouldStop` says so
 */
export function impedanceSweep(sweep: ImpedanceSweep, shouldStop?: () => boolean): SweepAnswer {
  const setting = sweep.setting ?? 'default';
  const part = sweep.part === null ? null : workpieceOf(sweep.part);
  const temperature = sweep.part?.temperatureC ?? 20;
  const ask = (frequency: number, loaded: boolean): SweepImpedance => {
    if (shouldStop?.()) throw new CheckStoppedError();
    const answer = solveImpedance({
      coil: sweep.coil,
      part: loaded ? part : null,
      frequency,
      // A part at one temperature throughout: cold means "as it starts".
      state: 'cold',
      startTemperatureC: temperature,
      targetTemperatureC: Math.max(temperature, 800),
      current: sweep.current ?? 1,
      includeLeads: sweep.includeLeads,
      setting,
    });
    return { ...answer, q: (2 * Math.PI * frequency * answer.inductance) / answer.resistance };
  };
  try {
    const results = sweep.frequencies.map((frequency) => ({
      frequency,
      bare: ask(frequency, false),
      loaded: part ? ask(frequency, true) : null,
    }));
    return { ok: true, result: { methodVersion, results } };
  } catch (error) {
    if (error instanceof InductionInputError)
      return { ok: false, field: error.field, message: error.message };
    throw error;
  }
}

function workpieceOf(part: SweepPart): Workpiece {
  const { material, form, outsideDiameter, insideDiameter, length, axialOffset } = part;
  return {
    material: material.kind === 'plain' ? ownOf(material) : material,
    form,
    outsideDiameter,
    insideDiameter,
    length,
    axialOffset,
    diameterTolerance: null,
    weighedMass: null,
    heatedLength: null,
    depthWanted: null,
    runout: null,
    rotation: false,
  };
}

function ownOf(plain: PlainMaterial): MaterialChoice {
  return {
    kind: 'own',
    own: {
      name: 'plain material',
      resistivity20: plain.resistivity,
      resistivityHot: plain.resistivity,
      relativePermeability: plain.relativePermeability,
      saturationFluxDensity: null,
      curieTemperatureC: null,
      density: 7850,
      specificHeat: 500,
      thermalConductivity: 30,
      emissivity: null,
      solidusC: null,
    },
  };
}
