import type { Coil, SolverSetting, Workpiece } from '../check/types.ts';

/** What is held constant while the part heats. */
export type HeatingDrive =
  /** Coil current, A rms. */
  | { kind: 'current'; current: number }
  /** Power into coil, leads and part together, W. */
  | { kind: 'power'; power: number }
  /** Voltage across coil, leads and fixed circuit (the tank), V rms. */
  | { kind: 'voltage'; voltage: number };

/** Where the frequency comes from. */
export type HeatingFrequency =
  | { kind: 'fixed'; frequency: number }
  /** A free-running supply follows the tank: frequency from capacitance and the inductance of the moment. */
  | { kind: 'tank'; tank: 'series' | 'parallel'; capacitance: number };

export interface HeatingInput {
  coil: Coil;
  part: Workpiece;
  drive: HeatingDrive;
  frequency: HeatingFrequency;
  /** Bus and head between the coil's terminals and the bank, H and Ω; added to the coil. */
  fixedInductance: number;
  fixedResistance: number;
  includeLeads: boolean;
  startTemperatureC: number;
  ambientTemperatureC: number;
  /** Heating time, s. */
  time: number;
  /** Ends the run when the surface reaches it; null: runs for the whole time. */
  targetTemperatureC: number | null;
  /** Hot resistivity of an own material is meant for this temperature, °C. */
  materialHotTemperatureC: number;
  /** W/(m²·K). */
  convection: number;
  /** null: the material's. */
  emissivity: number | null;
  setting: SolverSetting;
}

export interface HeatingPoint {
  /** s */
  time: number;
  /** Of the surface that looks at the coil, at the coil's middle, °C. */
  surfaceC: number;
  /** Mean over the part's enthalpy, °C. */
  meanC: number;
  /** On the axis (or the far side of a wall) at the same height, °C. */
  coreC: number;
  /** Hottest place of the part's surface, °C. */
  hottestC: number;
  /** Into the part, W. */
  partPower: number;
  /** Into coil, leads, fixed circuit and part, W. */
  totalPower: number;
  /** Radiation and convection from the part, W. */
  surfaceLoss: number;
  /** A rms. */
  current: number;
  /** Across coil, leads and fixed circuit, V rms. */
  voltage: number;
  /** Of coil with part, leads and fixed circuit, H and Ω. */
  inductance: number;
  resistance: number;
  /** Hz */
  frequency: number;
}

/** Energies over the run, J; `closure` = (stored + lost)/input − 1. */
export interface HeatingBalance {
  input: number;
  stored: number;
  lost: number;
  closure: number;
  /** Heat in copper, leads and fixed circuit. */
  coilLoss: number;
}

export type HeatingEnd = 'time' | 'target' | 'melting' | 'stopped' | 'limit';

export interface HeatingResult {
  /** At most 400 points, first and last included. */
  curve: HeatingPoint[];
  /** When the surface, and the core, pass the Curie point, s; null: not, or not magnetic. */
  curieSurfaceTime: number | null;
  curieCoreTime: number | null;
  curieTemperatureC: number | null;
  balance: HeatingBalance;
  end: HeatingEnd;
  /** Time reached, s. */
  time: number;
  /** Work done: field solutions (rounds of the permeability loop counted) and time steps. */
  fieldSolutions: number;
  fieldUpdates: number;
  steps: number;
  method: string;
  assumptions: string[];
}

export interface HeatingWatch {
  /** Share of the time done (0–1) and the newest point; called at every step. */
  onProgress?: (share: number, point: HeatingPoint) => void;
  /** Asked at every step; true ends the run with what there is. */
  shouldStop?: () => boolean;
}
