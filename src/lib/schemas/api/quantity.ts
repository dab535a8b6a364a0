/**
 * Building blocks of the API schemas: finite numbers with a sane range, a unit and a plain message. The ranges only
 * keep out what cannot be a coil, a part or a machine; what is merely unlikely is a finding of the check.
 */
import { z } from 'zod';

interface Range {
  min: number;
  max: number;
}

function ranged(name: string, unit: string, { min, max }: Range, description: string) {
  const text = `${name} must be a number from ${min} to ${max}${unit === '' ? '' : ` ${unit}`}.`;
  return z
    .number({ error: text })
    .min(min, text)
    .max(max, text)
    .describe(`${description}${unit === '' ? '' : ` [${unit}]`}`);
}

/** A number within limits, in the unit named. */
export const number = (name: string, unit: string, range: Range, description = name) =>
  ranged(name, unit, range, description);

/** Lengths that exist: larger than nothing, at most 20 m. */
export const length = (name: string, description = name) =>
  ranged(name, 'm', { min: 1e-6, max: 20 }, description);
/** Lengths that may be nothing. */
export const lengthOrZero = (name: string, description = name) =>
  ranged(name, 'm', { min: 0, max: 20 }, description);
/** Places, to either side. */
export const place = (name: string, description = name) =>
  ranged(name, 'm', { min: -20, max: 20 }, description);
export const temperatureC = (name: string, description = name) =>
  ranged(name, '°C', { min: -60, max: 3400 }, description);
export const frequency = (name: string, description = name) =>
  ranged(name, 'Hz', { min: 1, max: 1e8 }, description);
export const power = (name: string, description = name) =>
  ranged(name, 'W', { min: 1e-3, max: 1e9 }, description);
export const voltage = (name: string, description = name) =>
  ranged(name, 'V', { min: 1e-3, max: 1e6 }, description);
export const current = (name: string, description = name) =>
  ranged(name, 'A', { min: 1e-3, max: 1e7 }, description);
export const reactivePower = (name: string, description = name) =>
  ranged(name, 'var', { min: 1e-3, max: 1e10 }, description);
export const inductance = (name: string, description = name) =>
  ranged(name, 'H', { min: 0, max: 10 }, description);
export const capacitance = (name: string, description = name) =>
  ranged(name, 'F', { min: 1e-14, max: 1 }, description);
export const resistance = (name: string, description = name) =>
  ranged(name, 'ohm', { min: 0, max: 1e9 }, description);
export const pressure = (name: string, description = name) =>
  ranged(name, 'Pa', { min: 0, max: 1e9 }, description);
export const flow = (name: string, description = name) =>
  ranged(name, 'm3/s', { min: 0, max: 10 }, description);
export const fraction = (name: string, description = name) =>
  ranged(name, '', { min: 0, max: 1 }, `${description}, as a fraction`);
export const seconds = (name: string, description = name) =>
  ranged(name, 's', { min: 1e-3, max: 1e7 }, description);
export const text = (name: string, most: number, description = name) =>
  z
    .string({ error: `${name} must be text.` })
    .max(most, `${name} may have at most ${most} characters.`)
    .describe(description);
/** A whole number, in limits. */
export const count = (name: string, { min, max }: Range, description = name) => {
  const message = `${name} must be a whole number from ${min} to ${max}.`;
  return z.int({ error: message }).min(min, message).max(max, message).describe(description);
};
