/**
 * The tank as a circuit: from the inverter output through choke and transformer to bank, bus and coil.
 *
 * With the bank on the primary side the load branch is n²·(Z_coil + Z_fixed) + R_winding + jωL_leakage in parallel
 * with jωL_magnetising, and the bank stands across it (parallel) or before it (series). With the bank on the
 * secondary side the tank is closed there and the transformer carries only the inverter's current. Losses stay
 * where they arise: each capacitor as C with tan δ/(ωC) in series, each inductance with its resistance.
 *
 * Source: circuit theory; the arrangement of the branches is common practice of induction supplies.
 */
import { add, complex, divide, magnitude, multiply, parallel, scale, type Complex } from './complex.ts';

/** How the bank is connected to the load branch; a choke-fed and a push-pull tank are parallel ones. */
export type Connection = 'series' | 'parallel';

/** Coil with its leads, at one frequency: what the field solution gives. */
export interface CoilImpedance {
  inductance: number;
  resistance: number;
}

export interface TankCircuit {
  connection: Connection;
  /** Series choke between inverter and tank, H; 0 = none. */
  choke: number;
  /** Primary turns per secondary turn; 1 without transformer. */
  ratio: number;
  /** null without transformer. Leakage and resistance are referred to the primary. */
  transformer: { leakage: number; magnetising: number; resistance: number } | null;
  bankSide: 'primary' | 'secondary';
  /** Bank with stray capacitance, F. */
  capacitance: number;
  lossTangent: number;
  fixedInductance: number;
  fixedResistance: number;
}

/** Phasor magnitudes (rms) and powers for a given power at the inverter output. */
export interface CircuitState {
  inverterVoltage: number;
  inverterCurrent: number;
  coilCurrent: number;
  /** At the coil's contact faces. */
  coilVoltage: number;
  bankVoltage: number;
  bankCurrent: number;
  reactivePower: number;
  transformerVoltage: number;
  transformerCurrent: number;
  loss: { transformer: number; bank: number; bus: number; coil: number };
}

interface Branches {
  input: Complex;
  coil: Complex;
  bank: Complex;
  /** What stands across or beside the bank, on the bank's side. */
  load: Complex;
  /** Current per ampere at the inverter output. */
  bankCurrent: Complex;
  coilCurrent: Complex;
  transformerCurrent: Complex;
  transformerVoltage: Complex;
}

/**
 * Solves the circuit for one ampere at the inverter output.
 *
 * @param frequency Hz
 */
function solve(circuit: TankCircuit, coil: CoilImpedance, frequency: number): Branches {
  const omega = 2 * Math.PI * frequency;
  const zCoil = complex(coil.resistance, omega * coil.inductance);
  const bankReactance = -1 / (omega * circuit.capacitance);
  const bank = complex(circuit.lossTangent * -bankReactance, bankReactance);
  const secondary = add(zCoil, complex(circuit.fixedResistance, omega * circuit.fixedInductance));
  const choke = complex(0, omega * circuit.choke);
  const one = complex(1);
  const t = circuit.transformer;
  const n2 = circuit.ratio ** 2;
  const windings = t ? complex(t.resistance, omega * t.leakage) : complex(0);
  const magnetising = t && Number.isFinite(t.magnetising) ? complex(0, omega * t.magnetising) : null;
  if (circuit.bankSide === 'primary' || !t) {
    const reflected = add(scale(secondary, t ? n2 : 1), windings);
    const load = parallel(reflected, magnetising);
    const tank = circuit.connection === 'parallel' ? parallel(load, bank) : add(load, bank);
    const inLoad = circuit.connection === 'parallel' ? divide(bank, add(load, bank)) : one;
    const inWinding = multiply(inLoad, divide(load, reflected));
    return {
      input: add(choke, tank),
      coil: zCoil,
      bank,
      load,
      bankCurrent: circuit.connection === 'parallel' ? divide(load, add(load, bank)) : one,
      coilCurrent: scale(inWinding, t ? circuit.ratio : 1),
      transformerCurrent: inWinding,
      transformerVoltage: multiply(inLoad, load),
    };
  }
  const tank = circuit.connection === 'parallel' ? parallel(secondary, bank) : add(secondary, bank);
  const reflected = add(scale(tank, n2), windings);
  const seen = parallel(reflected, magnetising);
  const inWinding = divide(seen, reflected);
  const secondaryCurrent = scale(inWinding, circuit.ratio);
  const split = add(secondary, bank);
  const parallelTank = circuit.connection === 'parallel';
  return {
    input: add(choke, seen),
    coil: zCoil,
    bank,
    load: secondary,
    bankCurrent: parallelTank ? multiply(secondaryCurrent, divide(secondary, split)) : secondaryCurrent,
    coilCurrent: parallelTank ? multiply(secondaryCurrent, divide(bank, split)) : secondaryCurrent,
    transformerCurrent: inWinding,
    transformerVoltage: seen,
  };
}

/** Impedance at the inverter output, Ω. */
export function inputImpedance(circuit: TankCircuit, coil: CoilImpedance, frequency: number): Complex {
  return solve(circuit, coil, frequency).input;
}

/**
 * Inductance and resistance that stand against the bank, on the bank's side: n²·(L_coil + L_fixed) + L_leakage in
 * parallel with the magnetising inductance when the bank is on the primary side.
 */
export function tankBranch(circuit: TankCircuit, coil: CoilImpedance, frequency: number): CoilImpedance {
  const { load } = solve(circuit, coil, frequency);
  return { inductance: load.im / (2 * Math.PI * frequency), resistance: load.re };
}

/** Everything in the circuit when `power` watts leave the inverter at `frequency`. */
export function circuitState(
  circuit: TankCircuit,
  coil: CoilImpedance,
  frequency: number,
  power: number,
): CircuitState {
  const b = solve(circuit, coil, frequency);
  const current = Math.sqrt(power / b.input.re);
  const coilCurrent = magnitude(b.coilCurrent) * current;
  const bankCurrent = magnitude(b.bankCurrent) * current;
  const winding = magnitude(b.transformerCurrent) * current;
  return {
    inverterVoltage: magnitude(b.input) * current,
    inverterCurrent: current,
    coilCurrent,
    coilVoltage: magnitude(b.coil) * coilCurrent,
    bankVoltage: magnitude(b.bank) * bankCurrent,
    bankCurrent,
    reactivePower: bankCurrent ** 2 * Math.abs(b.bank.im),
    transformerVoltage: magnitude(b.transformerVoltage) * current,
    transformerCurrent: circuit.transformer ? winding : 0,
    loss: {
      transformer: circuit.transformer ? winding ** 2 * circuit.transformer.resistance : 0,
      bank: bankCurrent ** 2 * b.bank.re,
      bus: coilCurrent ** 2 * circuit.fixedResistance,
      coil: coilCurrent ** 2 * b.coil.re,
    },
  };
}
