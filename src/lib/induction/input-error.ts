/** Why an input cannot be computed. Stable codes: screens and the API map them to fields. */
export type InductionInputCode =
  | 'not-a-number'
  | 'not-positive'
  | 'out-of-range'
  | 'turns-open'
  | 'size-open'
  | 'turns-overlap'
  | 'part-overlaps-coil'
  | 'section-impossible'
  | 'does-not-conduct'
  | 'unknown-material'
  | 'outside-method'
  | 'too-many-unknowns'
  | 'not-converged';

/**
 * An input outside what the physics can answer. The message is plain English for the person who typed
 * it; `field` is the path of the value it is about (for example `coil.winding.pitch`). Every refusal of
 * the field solver, the materials and the heating run is one of these, so that a caller can turn it
 * into a finding; any other exception is a fault of ours.
 */
export class InductionInputError extends Error {
  readonly code: InductionInputCode;
  readonly field: string;

  constructor(code: InductionInputCode, field: string, message: string) {
    super(message);
    this.name = 'InductionInputError';
    this.code = code;
    this.field = field;
  }
}

/** Throws unless `value` is a finite number within [low, high]; `name` is how people call it. */
export function requireWithin(value: number, low: number, high: number, field: string, name: string): void {
  if (!Number.isFinite(value)) {
    throw new InductionInputError('not-a-number', field, `${name} must be a number.`);
  }
  if (value < low || value > high) {
    const code = low >= 0 && value <= 0 ? 'not-positive' : 'out-of-range';
    throw new InductionInputError(
      code,
      field,
      `${name} must lie between ${low} and ${high} (SI units), not ${value}.`,
    );
  }
}
