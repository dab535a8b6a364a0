import type { ImpedanceSweep } from '../../induction/check/impedance-sweep.ts';
import { solveInThread } from './solve-pool.ts';

/** Impedance of a coil over frequencies, as the response's text. */
export function runSweep(sweep: ImpedanceSweep): Promise<string> {
  return solveInThread({ kind: 'sweep', sweep });
}
