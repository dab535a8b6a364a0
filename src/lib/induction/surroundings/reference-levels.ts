/**
 * Reference levels for exposure of people to magnetic fields, rms, as flux density in T.
 *
 * ICNIRP 2010 (Health Phys 99:818, tables 3 and 4): 1 Hz to 10 MHz, instantaneous. ICNIRP 2020 (Health Phys 118:483),
 * 100 kHz to 30 MHz: whole body 4.9/f and 2.2/f A/m over 30 min (from memory), local 10.8/f and 4.9/f A/m over 6 min,
 * f in MHz. Above 100 kHz both apply: the stricter is taken. These are reference levels, not limits; what applies at a
 * workplace is set by local law.
 */
import { MU0 } from '../constants/physical.ts';

export type Exposure = 'occupational' | 'public';

/** ICNIRP 2010 flux density, T; 300 Hz to 10 MHz occupational, 400 Hz to 10 MHz public (held below). */
export function icnirp2010(frequency: number, exposure: Exposure): number {
  if (exposure === 'occupational') return frequency < 3000 ? Math.min(1e-3, 0.3 / frequency) : 1e-4;
  return frequency < 3000 ? Math.min(2e-4, 0.08 / frequency) : 2.7e-5;
}

/** ICNIRP 2010 electric field, V/m. */
export function icnirp2010Electric(frequency: number, exposure: Exposure): number {
  if (exposure === 'occupational') return frequency < 3000 ? 5e5 / frequency : 170;
  return frequency < 3000 ? 2.5e5 / frequency : 83;
}

/** ICNIRP 2020 magnetic field, A/m: whole body 30 min or local 6 min; 0.1 to 30 MHz. */
export function icnirp2020(frequency: number, exposure: Exposure, kind: 'whole-body' | 'local'): number {
  const mega = frequency / 1e6;
  if (kind === 'whole-body') return (exposure === 'occupational' ? 4.9 : 2.2) / mega;
  return (exposure === 'occupational' ? 10.8 : 4.9) / mega;
}

export interface ReferenceLevel {
  /** T rms */
  fluxDensity: number;
  name: string;
}

/** The stricter level at a frequency, with its name and averaging time. */
export function referenceLevel(frequency: number, exposure: Exposure): ReferenceLevel {
  const low = icnirp2010(frequency, exposure);
  if (frequency >= 1e5) {
    const high = MU0 * icnirp2020(frequency, exposure, 'whole-body');
    if (high < low) return { fluxDensity: high, name: `ICNIRP 2020 ${exposure}, whole body, 30 min mean` };
  }
  return { fluxDensity: low, name: `ICNIRP 2010 ${exposure}, instantaneous` };
}
