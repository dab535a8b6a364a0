import { defineStateMachine } from './transitions.ts';

/** One asking of a fabricator to be verified, and what an admin decided on it. */
export const verificationMachine = defineStateMachine({
  name: 'verification',
  initial: 'asked',
  states: ['asked', 'verified', 'refused', 'withdrawn', 'revoked'],
  transitions: [
    { event: 'verify', from: ['asked'], to: 'verified' },
    { event: 'refuse', from: ['asked'], to: 'refused' },
    { event: 'withdraw', from: ['asked'], to: 'withdrawn' },
    { event: 'revoke', from: ['verified'], to: 'revoked' },
  ],
});
export type VerificationState = (typeof verificationMachine.states)[number];

/** Shapes a shop can say it makes; the keys are those of a requirement's coil. */
export const coilShapeCapabilities = {
  helix: 'Cylindrical helix',
  conical: 'Conical helix',
  stepped: 'Stepped helix',
  pancake: 'Pancake',
  'single-turn': 'Single turn',
  bore: 'Bore coil',
  racetrack: 'Racetrack',
  'rectangular-helix': 'Rectangular helix',
  hairpin: 'Hairpin',
  channel: 'Channel',
} as const;
export type CoilShapeCapability = keyof typeof coilShapeCapabilities;

export const shopWorkCapabilities = {
  'braze-silver': 'Silver brazing, cadmium-free filler',
  'braze-phosphorus': 'Copper-phosphorus brazing',
  machining: 'Machined inductors',
  fixtures: 'Fixtures and nests',
  potting: 'Potting and coating',
  concentrators: 'Flux concentrators fitted',
  repair: 'Repair of coils',
} as const;
export type ShopWorkCapability = keyof typeof shopWorkCapabilities;

export const shopTestCapabilities = {
  inductance: 'Inductance at a stated frequency',
  pressure: 'Hydrostatic pressure',
  flow: 'Flow at pressure',
  'hi-pot': 'Dielectric withstand',
  dimensions: 'Dimensional report',
  'full-power': 'Trial at power',
} as const;
export type ShopTestCapability = keyof typeof shopTestCapabilities;

/** What a fabricator makes. Lengths in metres; null where nothing was stated. */
export interface ShopCapabilities {
  shapes: CoilShapeCapability[];
  work: ShopWorkCapability[];
  tests: ShopTestCapability[];
  /** Outside size of copper tube that the shop bends, m. */
  tubeMin: number | null;
  tubeMax: number | null;
  /** Largest coil, m. */
  coilDiameterMax: number | null;
  coilLengthMax: number | null;
}

/** What an admin can confirm; each is said with the verification, nothing else is. */
export const verifiedItems = {
  'legal-entity': 'The company exists in its public register',
  'works-address': 'The works address is where it says',
  insurance: 'Liability insurance was shown and is in force',
  equipment: 'The equipment list was shown',
  'test-equipment': 'Measuring instruments with calibration dates were shown',
  references: 'Earlier customers were asked',
  'quality-system': 'A certificate of a quality system was shown',
} as const;
export type VerifiedItem = keyof typeof verifiedItems;

/** A verification is given for this long at most; then it is asked for again. */
export const verificationMaxDays = 3 * 366;

/** Keys of a table of words, with their type. */
export function keysOf<T extends Record<string, string>>(table: T): (keyof T & string)[] {
  return Object.keys(table) as (keyof T & string)[];
}
