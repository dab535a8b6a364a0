/** What the supply can push into the load it sees. */
import type { Limiter } from '../check/types.ts';
import { inputImpedance, type CoilImpedance, type TankCircuit } from './circuit.ts';

export interface SupplyLimits {
  /** W; Infinity when not known. */
  ratedPower: number;
  /** V rms at the inverter output; Infinity when not known. */
  voltage: number;
  /** A rms at the inverter output; Infinity when not known. */
  current: number;
}

export interface Deliverable {
  power: number;
  limitedBy: Limiter;
  /** What each limit alone would allow, W. */
  byVoltage: number;
  byCurrent: number;
}

/**
 * Deliverable power at the inverter output: the least of the rated power, V²·R/|Z|² and I²·R with Z = R + jX seen
 * by the inverter. Source: circuit theory (fundamental, rms).
 */
export function deliverablePower(
  circuit: TankCircuit,
  coil: CoilImpedance,
  frequency: number,
  limits: SupplyLimits,
): Deliverable {
  const z = inputImpedance(circuit, coil, frequency);
  const byVoltage = (limits.voltage ** 2 * z.re) / (z.re ** 2 + z.im ** 2);
  const byCurrent = limits.current ** 2 * z.re;
  const power = Math.min(limits.ratedPower, byVoltage, byCurrent);
  const limitedBy: Limiter =
    power === limits.ratedPower ? 'rated-power' : power === byVoltage ? 'voltage' : 'current';
  return { power, limitedBy, byVoltage, byCurrent };
}
