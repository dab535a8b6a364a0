import { describe, expect, it } from 'vitest';
import type { Dimension, UnitSet } from './dimensions.ts';
import { dimensions, dimensionTable } from './dimensions.ts';
import { parseQuantity } from './parse-quantity.ts';

const value = (text: string, dimension: Dimension, set: UnitSet = 'metric') => {
  const parsed = parseQuantity(text, dimension, set);
  return parsed.ok ? parsed.value : parsed.message;
};

describe('typed quantities', () => {
  it.each<[string, Dimension, UnitSet, number]>([
    ['3/8 in', 'length', 'metric', 0.009525],
    ['3/8"', 'length', 'metric', 0.009525],
    ['⅜ in', 'length', 'metric', 0.009525],
    ['1 1/2 in', 'length', 'metric', 0.0381],
    ['1-1/2"', 'length', 'metric', 0.0381],
    ['1½ in', 'length', 'metric', 0.0381],
    [`1' 6"`, 'length', 'metric', 0.4572],
    ['2 ft 3 1/2 in', 'length', 'metric', 0.6985],
    ['9.5mm', 'length', 'inch', 0.0095],
    ['9,5 mm', 'length', 'metric', 0.0095],
    ['0,125 in', 'length', 'metric', 0.003175],
    ['9.5', 'length', 'metric', 0.0095],
    ['0.5', 'length', 'inch', 0.0127],
    ['.5', 'length', 'inch', 0.0127],
    ['-2,5', 'length', 'metric', -0.0025],
    ['1 000 mm', 'length', 'metric', 1],
    ['1.234,5 mm', 'length', 'metric', 1.2345],
    ['1,234.5 mm', 'length', 'metric', 1.2345],
    ['1,234,567 µm', 'length', 'metric', 1.234567],
    ['1.5e3 mm', 'length', 'metric', 1.5],
    ['30 thou', 'length', 'metric', 0.000762],
    ['0.66 uF', 'capacitance', 'metric', 0.66e-6],
    ['0.66 μF', 'capacitance', 'metric', 0.66e-6],
    ['330nF', 'capacitance', 'metric', 330e-9],
    ['2 mfd', 'capacitance', 'metric', 2e-6],
    ['0.85 µH', 'inductance', 'metric', 0.85e-6],
    ['120 nH', 'inductance', 'metric', 120e-9],
    ['60 psi', 'pressure', 'metric', 413685.43759],
    ['60', 'pressure', 'inch', 413685.43759],
    ['4 bar', 'pressure', 'inch', 4e5],
    ['0.4 MPa', 'pressure', 'inch', 4e5],
    ['1560 °F', 'temperature', 'metric', 848.888888889],
    ['1560', 'temperature', 'inch', 848.888888889],
    ['850C', 'temperature', 'inch', 850],
    ['300 K', 'temperature', 'metric', 26.85],
    ['2 US gal/min', 'flow', 'metric', 2 * 6.30901964e-5],
    ['2 gpm', 'flow', 'metric', 2 * 6.30901964e-5],
    ['6 L/min', 'flow', 'inch', 1e-4],
    ['6 l/min', 'flow', 'inch', 1e-4],
    ['50 kW', 'power', 'metric', 50e3],
    ['50', 'power', 'metric', 50e3],
    ['20 khz', 'frequency', 'metric', 20e3],
    ['300 kvar', 'reactive-power', 'metric', 300e3],
    ['1.2 kA', 'current', 'metric', 1200],
    ['12 mΩ', 'resistance', 'metric', 0.012],
    ['12 mohm', 'resistance', 'metric', 0.012],
    ['1.8 lb', 'mass', 'metric', 0.816466266],
    ['90 s', 'time', 'metric', 90],
    ['1.5 min', 'time', 'metric', 90],
    ['5 %', 'fraction', 'metric', 0.05],
    ['100 µT', 'flux-density', 'metric', 1e-4],
    ['5', 'number', 'metric', 5],
  ])('reads %s as %s in the %s set', (text, dimension, set, expected) => {
    expect(value(text, dimension, set)).toBeCloseTo(
      expected,
      Math.max(4, 9 - Math.round(Math.log10(Math.abs(expected)))),
    );
  });

  it('asks when a comma before three digits may mean a thousand or a decimal', () => {
    expect(value('1,000', 'length')).toContain('may be 1000 or 1.000');
    expect(value('12,500 Hz', 'frequency')).toContain('may be 12500 or 12.500');
  });

  it.each<[string, Dimension]>([
    ['mW', 'power'],
    ['mw', 'power'],
    ['mPa', 'pressure'],
    ['mhz', 'frequency'],
    ['MOHM', 'resistance'],
  ])('asks for capitals when %s could be milli or mega', (unit, dimension) => {
    expect(value(`5 ${unit}`, dimension)).toContain('capitals');
  });

  it.each<[string, Dimension]>([
    ['', 'length'],
    ['abc', 'length'],
    ['5 kg', 'length'],
    ['2 mF', 'capacitance'],
    ['3/0 in', 'length'],
    ['1,2,3 mm', 'length'],
    ['1.2.3 mm', 'length'],
    ['1e999 mm', 'length'],
    ['5 mm 3', 'length'],
    ['- mm', 'length'],
    ['5 %', 'number'],
  ])('refuses %s with a message that says what to write', (text, dimension) => {
    const parsed = parseQuantity(text, dimension, 'metric');
    expect(parsed.ok).toBe(false);
    expect(parsed.ok ? '' : parsed.message).toMatch(/Write|use|capitals/);
  });

  it('reads every shown symbol of every dimension back to its own factor', () => {
    for (const dimension of dimensions) {
      for (const unit of dimensionTable[dimension].units) {
        if (unit.hidden) continue;
        for (const spelling of [unit.symbol, ...(unit.aliases ?? [])]) {
          const parsed = parseQuantity(`2 ${spelling}`, dimension, 'metric');
          expect(parsed, `${dimension} ${spelling}`).toMatchObject({ ok: true });
          if (parsed.ok && spelling !== '') expect(parsed.unit, `${dimension} ${spelling}`).toBe(unit.symbol);
        }
      }
    }
  });
});
