/** Flux density around the coil and the distance to keep. */
import { coilField, keepOutDistance, worstFieldAt, type FieldSource } from '../surroundings/loop-field.ts';
import { referenceLevel, type Exposure } from '../surroundings/reference-levels.ts';
import { figure } from './figure.ts';
import type { Geometry } from './resolve.ts';
import type { Figure, Requirement, SurroundingsFigures } from './types.ts';

/** The coil as seen from some way off. Coils that are not round are rings of equal area. */
export function fieldSource(geometry: Geometry): FieldSource | null {
  const { rings, resolved, coil } = geometry;
  const leadsFrom = (start: number) =>
    coil.leads && coil.leads.length > 0
      ? { start, length: coil.leads.length, spacing: coil.leads.spacing }
      : null;
  if (rings) {
    const outer = Math.max(...rings.rings.map((ring) => ring.radius));
    return { rings: rings.rings, turnsPerRing: rings.turns / rings.rings.length, leads: leadsFrom(outer) };
  }
  const w = coil.winding;
  if (!resolved) return null;
  const area =
    w.shape === 'racetrack' || w.shape === 'rectangular-helix' || w.shape === 'channel'
      ? w.insideLength * w.insideWidth
      : w.shape === 'hairpin'
        ? w.length * w.legGap
        : 0;
  if (!(area > 0)) return null;
  const radius = Math.sqrt(area / Math.PI);
  const count = Math.max(1, Math.round(resolved.turns));
  return {
    rings: Array.from({ length: count }, (_, i) => ({ radius, z: (i - (count - 1) / 2) * resolved.pitch })),
    turnsPerRing: resolved.turns / count,
    leads: leadsFrom(radius),
  };
}

const assumptions = [
  'Coil and leads in air: no shielding, no part, no other metal.',
  'Implants: no number is given; keep out and ask a doctor.',
];

/**
 * @param current largest coil current, A rms, with its relative half band
 */
export function surroundingsFigures(
  requirement: Requirement,
  geometry: Geometry,
  current: { value: number; band: number },
  frequency: number,
  exposure: Exposure = 'occupational',
): SurroundingsFigures | null {
  const source = fieldSource(geometry);
  if (!source) return null;
  const level = referenceLevel(frequency, exposure);
  const distance = keepOutDistance(source, current.value, level.fluxDensity);
  // Far off the field falls with the third power of distance (second for leads): a third of the current's band.
  const share = (current.band + 0.15) / 2.5;
  const density = (value: number): Figure =>
    figure(
      value,
      'T',
      'rings and straight leads in air',
      [
        { name: 'coil current', variation: { value: current.band, unit: '1' }, change: value * current.band },
        { name: 'run of the leads', variation: { value: 0.15, unit: '1' }, change: value * 0.15 },
      ],
      { assumptions },
    );
  const points = requirement.fixture.metalParts.map((metal) => ({
    name: metal.name || 'metal part',
    fluxDensity: density(coilField(source, { x: metal.r, y: 0, z: metal.z }) * current.value),
  }));
  const operator = requirement.fixture.operatorDistance;
  if (operator !== null && operator > 0) {
    points.push({
      name: 'place of the person',
      fluxDensity: density(worstFieldAt(source, operator) * current.value),
    });
  }
  return {
    keepOutDistance: figure(
      distance,
      'm',
      'rings and straight leads in air',
      [
        {
          name: 'coil current and leads',
          variation: { value: current.band + 0.15, unit: '1' },
          change: distance * share,
        },
      ],
      { assumptions, least: 0 },
    ),
    referenceLevel: { value: level.fluxDensity, unit: 'T' },
    referenceName: level.name,
    points,
  };
}
