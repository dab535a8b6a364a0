import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import type { Unit } from '../check/types.ts';
import { dimensionOfUnit, dimensions, dimensionTable, type UnitSet } from './dimensions.ts';
import { formatField, formatFigure, formatQuantity } from './format-quantity.ts';
import { parseQuantity } from './parse-quantity.ts';

describe('formatted quantities', () => {
  it.each<[number, Unit, UnitSet, number | undefined, string]>([
    [0.009525, 'm', 'metric', undefined, '9.525 mm'],
    [0.009525, 'm', 'inch', undefined, '0.375 in'],
    [1.2345, 'm', 'metric', undefined, '1.234 m'],
    [20034, 'Hz', 'metric', 500, '20.0 kHz'],
    [20034, 'Hz', 'metric', 501, '20 kHz'],
    [20034, 'Hz', 'metric', 50, '20.03 kHz'],
    [838e-9, 'H', 'metric', 42e-9, '840 nH'],
    [0.8382e-6, 'H', 'metric', 4e-9, '838 nH'],
    [0.01234, 'ohm', 'metric', 0.0006, '12 mΩ'],
    [849.7, 'C', 'metric', 10, '850 °C'],
    [850, 'C', 'inch', undefined, '1562 °F'],
    [15, 'K', 'inch', undefined, '27 °F'],
    [1e-4, 'm3/s', 'metric', undefined, '6 L/min'],
    [1e-4, 'm3/s', 'inch', undefined, '1.585 US gal/min'],
    [4e5, 'Pa', 'inch', undefined, '58.02 psi'],
    [50e3, 'W', 'metric', 2e3, '50 kW'],
    [0, 'A', 'metric', undefined, '0 A'],
    [-0.0001, 'm', 'metric', 0.01, '0 mm'],
    [1234, 'A', 'metric', 3000, '1 kA'],
    [Number.NaN, 'A', 'metric', undefined, '–'],
    [45, 'deg', 'metric', undefined, '45°'],
  ])('shows %s %s in the %s set with band %s as %s', (value, unit, set, band, expected) => {
    expect(formatQuantity(value, unit, set, band)).toBe(expected);
  });

  it('shows a figure and its band in one unit', () => {
    const figure = {
      value: 999,
      low: 970,
      high: 1030,
      unit: 'Hz',
      method: '',
      assumptions: [],
      contributors: [],
    } as const;
    expect(formatFigure({ ...figure, assumptions: [], contributors: [] }, 'metric')).toEqual({
      value: '1000 Hz',
      range: '970 to 1030 Hz',
    });
  });

  it('never shows a digit finer than a fifth of the band', () => {
    fc.assert(
      fc.property(
        fc.double({ min: 1e-3, max: 1e5, noNaN: true }),
        fc.double({ min: 1e-4, max: 0.9, noNaN: true }),
        (value, share) => {
          const band = value * share;
          const text = formatQuantity(value, 'm', 'metric', band);
          const parsed = /^(-?\d+(?:\.(\d+))?) (mm|m)$/.exec(text);
          expect(parsed, text).not.toBeNull();
          const unit = parsed?.[3] === 'mm' ? 1e-3 : 1;
          if (parsed?.[2])
            expect(10 ** -parsed[2].length * unit).toBeGreaterThanOrEqual((band / 5) * (1 - 1e-6));
          // and what is shown stays within the band of the value
          expect(Math.abs(Number(parsed?.[1]) * unit - value)).toBeLessThanOrEqual(
            Math.max(band, value * 0.5),
          );
        },
      ),
    );
  });

  it('shows field texts that read back as the stored value, in every dimension and both sets', () => {
    for (const dimension of dimensions) {
      for (const set of ['metric', 'inch'] as const) {
        fc.assert(
          fc.property(fc.double({ min: 1e-3, max: 1e4, noNaN: true }), (typed) => {
            const field = dimensionTable[dimension].units.find(
              (u) => u.symbol === dimensionTable[dimension].field[set],
            );
            const si = typed * (field?.factor ?? 1) + (field?.offset ?? 0);
            const back = parseQuantity(formatField(si, dimension, set), dimension, set);
            expect(back.ok).toBe(true);
            if (back.ok)
              expect(Math.abs(back.value - si)).toBeLessThanOrEqual(
                2e-7 * (Math.abs(si) + (field?.factor ?? 1)),
              );
          }),
          { numRuns: 50 },
        );
      }
    }
  });

  it('shows figures that read back within their rounding', () => {
    const units = Object.keys(dimensionOfUnit) as Unit[];
    for (const unit of units) {
      for (const set of ['metric', 'inch'] as const) {
        fc.assert(
          fc.property(fc.double({ min: 1e-4, max: 1e5, noNaN: true }), (value) => {
            const back = parseQuantity(formatQuantity(value, unit, set), dimensionOfUnit[unit], set);
            expect(back.ok).toBe(true);
            if (back.ok)
              expect(Math.abs(back.value - value)).toBeLessThanOrEqual(0.03 + Math.abs(value) * 1e-3);
          }),
          { numRuns: 40 },
        );
      }
    }
  });
});
