import type { Coil } from '../check/types.ts';
import type { RingCoil } from '../coil/rings.ts';
import type { Section } from '../coil/section.ts';
import { checkedLeads, leadedPath } from '../coil/wire-path.ts';
import { mutualInductance } from './ring-kernel.ts';
import { leadPairInductance, pathInductance, thinPairInductance } from './segment-inductance.ts';
import { straightTubeImpedance } from './tube-operator.ts';

/** Radius of the round tube with the same perimeter, m: what surface current sees. */
export function perimeterRadius(section: Section): number {
  if (section.kind === 'round') return section.radius;
  const straight = 4 * (section.halfAxial + section.halfRadial);
  return (straight - (8 - 2 * Math.PI) * section.outerCorner) / (2 * Math.PI);
}

/** What legs, leads and the helix itself add to the rings. */
export interface LeadGeometry {
  /** Added inductance, H (may be slightly negative for a short lead on a tight helix). */
  inductance: number;
  /** Straight legs between the end turns and the leads, m. */
  legs: number;
  /** Length of each of the two leads and their spacing, m. */
  length: number;
  spacing: number;
}

/**
 * Inductance that leads, legs and the true helix add to the ring solution: thin-wire integral of the whole
 * path less that of the ring stack, both with the same regularised distance, and the lead pair corrected
 * from thin wire to round tubes side by side.
 *
 * Range: leads longer than their spacing; coupling of the leads with the part is neglected.
 * Source: Neumann's integral; exact pair of cylinders for the leads.
 */
export function leadGeometry(coil: Coil, rings: RingCoil): LeadGeometry | null {
  if (coil.leads === null) return null;
  const a = perimeterRadius(rings.section);
  const { path, legs } = leadedPath(coil, rings, coil.leads);
  let stack = 0;
  for (const p of rings.rings) {
    for (const q of rings.rings) stack += mutualInductance(p.radius, q.radius, Math.hypot(p.z - q.z, a));
  }
  const scale = rings.turns / rings.rings.length;
  const { length, spacing } = coil.leads;
  const pair = length * (leadPairInductance(spacing, a) - thinPairInductance(spacing, a));
  return { inductance: pathInductance([path], a) - stack * scale * scale + pair, legs, length, spacing };
}

/** Inductance of a straight pair of leads alone, H, for coils whose turns are not rings. */
export function plainLeads(coil: Coil, section: Section): LeadGeometry | null {
  if (coil.leads === null) return null;
  const { length, spacing } = checkedLeads(coil.leads, 2 * section.halfAxial);
  return {
    inductance: length * leadPairInductance(spacing, perimeterRadius(section)),
    legs: 0,
    length,
    spacing,
  };
}

/**
 * Resistance of legs and leads, Ω: the tube's own AC resistance, for the pair with the proximity factor
 * 1/√(1 − (2a/D)²). Source: exact pair of cylinders with thin skin.
 */
export function leadResistance(
  leads: LeadGeometry,
  section: Section,
  resistivity: number,
  frequency: number,
): number {
  const a = perimeterRadius(section);
  const alone = straightTubeImpedance(a, Math.min(section.wall, a), resistivity, frequency).re;
  const closeness = Math.min(0.95, (2 * a) / leads.spacing);
  return alone * (leads.legs + (2 * leads.length) / Math.sqrt(1 - closeness * closeness));
}
