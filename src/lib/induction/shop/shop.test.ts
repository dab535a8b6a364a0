import { describe, expect, it } from 'vitest';
import { exampleRequirement } from '../check/examples.ts';
import type { Coil } from '../check/types.ts';
import { copperPath, wallAfterBending } from './path.ts';
import { barlow, flatWallBulge, flatWallStress, pressureRating, widestFlat } from './pressure.ts';
import { shopSheet } from './shop-sheet.ts';
import { findStock } from './tube-stock.ts';

const { coil, part } = exampleRequirement();
const withWinding = (winding: Coil['winding']): Coil => ({ ...coil, winding });

describe('copper path', () => {
  it('is the helix length of every turn', () => {
    const path = copperPath(coil, part);
    expect(path?.windingLength).toBeCloseTo(5 * Math.hypot(Math.PI * 0.058, 0.013), 12);
    expect(path?.bendRadius).toBeCloseTo(0.029, 12);
  });

  it('is the rounded rectangle of a rectangular helix and two half circles and straights of a racetrack', () => {
    const rectangular = copperPath(
      withWinding({
        shape: 'rectangular-helix',
        insideLength: 0.1,
        insideWidth: 0.04,
        cornerRadius: 0.01,
        turns: 1,
        pitch: 0.012,
      }),
      null,
    );
    const straight = 2 * (0.08 + 0.02) + 2 * Math.PI * 0.015;
    expect(rectangular?.windingLength).toBeCloseTo(Math.hypot(straight, 0.012), 12);
    expect(rectangular?.bends).toBe(4);
    const racetrack = copperPath(
      withWinding({
        shape: 'racetrack',
        insideLength: 0.1,
        insideWidth: 0.04,
        cornerRadius: 0.02,
        turns: 1,
        pitch: 0.012,
      }),
      null,
    );
    expect(racetrack?.windingLength).toBeCloseTo(Math.hypot(2 * 0.06 + Math.PI * 0.05, 0.012), 12);
  });

  it('is not known for a coil by drawing', () => {
    expect(copperPath(withWinding({ shape: 'drawing', note: 'see sheet 2' }), null)).toBeNull();
  });

  it('thins the outer wall more the tighter the bend', () => {
    expect(wallAfterBending(0.001, 0.029, 0.01)).toBeCloseTo(0.001 * (29 / 34), 12);
    expect(wallAfterBending(0.001, 0.01, 0.01)).toBeLessThan(wallAfterBending(0.001, 0.03, 0.01));
  });
});

describe('pressure', () => {
  it('takes the flat wall of square tube as a plate, 32 MPa at 10 bar for 10 × 10 × 1 mm', () => {
    const square = { kind: 'square', side: 0.01, wall: 0.001, cornerRadius: 0 } as const;
    expect(flatWallStress(1e6, widestFlat(square), 0.001)).toBeCloseTo(32e6, 3);
    expect(pressureRating(square)).toBeLessThan(barlow(0.01, 0.001));
    expect(flatWallStress(pressureRating(square), widestFlat(square), 0.001)).toBeCloseTo(
      6000 * 6894.757,
      -2,
    );
    expect(flatWallBulge(1e6, 0.008, 0.001)).toBeCloseTo(9.7e-7, 8);
  });
});

describe('tube stock', () => {
  it('knows the sizes of the standards and names the nearest of others', () => {
    const tube = (od: number, wall: number) => findStock({ kind: 'round', outsideDiameter: od, wall });
    expect(tube(0.009525, 0.032 * 0.0254)).toMatchObject({ stocked: true });
    expect(tube(0.008, 0.0008)).toMatchObject({ stocked: true, tube: { standard: 'ASTM B88M type B' } });
    expect(tube(0.01, 0.0015)).toMatchObject({
      stocked: false,
      nearest: { outsideDiameter: 0.01, wall: 0.0009 },
    });
    expect(findStock({ kind: 'square', side: 0.01, wall: 0.001, cornerRadius: 0 })).toEqual({
      stocked: false,
      nearest: null,
    });
  });
});

describe('shop sheet', () => {
  const path = copperPath(coil, part);
  if (!path) throw new Error('a helix has a path');

  it('weighs the copper of winding and leads', () => {
    const sheet = shopSheet(coil, path, [], null);
    const length = path.windingLength + 0.2;
    const mass = Math.PI * (0.005 ** 2 - 0.004 ** 2) * length * 8920;
    expect(sheet.developedLength.value).toBeCloseTo(length, 12);
    expect(sheet.copperMass.value).toBeCloseTo(mass, 9);
    expect(sheet.mandrelDiameter?.value).toBeCloseTo(0.048, 12);
    expect(sheet.bendRadiusOverTube).toBeCloseTo(2.9, 9);
  });

  it('adds a joint for a centre tap, for each more circuit, and where the tube is longer than stock', () => {
    const base = shopSheet(coil, path, [], null).brazedJoints;
    expect(shopSheet({ ...coil, centreTap: true }, path, [], null).brazedJoints).toBe(base + 1);
    expect(shopSheet({ ...coil, waterCircuits: 2 }, path, [], null).brazedJoints).toBe(base + 2);
    expect(shopSheet(coil, { ...path, windingLength: 20 }, [], null).brazedJoints).toBe(base + 1);
  });

  it('lists the tests asked and the usual ones not asked', () => {
    const sheet = shopSheet(coil, path, exampleRequirement().acceptance, null);
    expect(sheet.tests[0]).toBe('Inductance of the coil alone');
    expect(sheet.tests.filter((test) => test.startsWith('Inductance'))).toHaveLength(1);
    expect(sheet.tests.some((test) => test.includes('Hydrostatic'))).toBe(true);
  });
});
