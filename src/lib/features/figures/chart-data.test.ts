import { describe, expect, test } from 'vitest';
import {
  axisUnit,
  chainBars,
  chainSentence,
  csvOf,
  inBand,
  ladderSentence,
  plain,
  spread,
  timeAt,
} from './chart-data.ts';
import { sampleChain, sampleLadder } from './figure-samples.ts';

test('an axis takes the unit in which its largest value reads well', () => {
  expect(axisUnit(98_000, 'Hz')).toEqual({ factor: 1e-3, symbol: 'kHz' });
  expect(axisUnit(1_350_000, 'Hz').symbol).toBe('MHz');
  expect(axisUnit(400, 'W').symbol).toBe('W');
  expect(axisUnit(0, 'W').symbol).toBe('W');
});

test('labels carry three digits and no exponent', () => {
  expect([
    plain(0),
    plain(9.7512),
    plain(97.51),
    plain(975.1),
    plain(12345),
    plain(-0.0512),
    plain(Number.NaN),
  ]).toEqual(['0', '9.75', '97.5', '975', '12345', '−0.0512', '–']);
});

describe('CSV', () => {
  test('quotes what needs it and disarms formulas', () => {
    expect(
      csvOf(
        ['a', 'b'],
        [
          ['x,y', 1.5],
          ['=SUM(A1)', null],
          ['say "no"', Number.NaN],
        ],
      ),
    ).toBe('a,b\r\n"x,y",1.5\r\n\'=SUM(A1),\r\n"say ""no""",\r\n');
  });
});

test('a band that is open to one side holds everything there', () => {
  expect(inBand(5, { min: null, max: 10 })).toBe(true);
  expect(inBand(11, { min: null, max: 10 })).toBe(false);
  expect(inBand(4, { min: 5, max: null })).toBe(false);
});

test('the ladder’s sentence counts rows in band and names the advised one', () => {
  // By hand: 3 units ring at 113 kHz hot, above the band; 4 to 8 lie between 66 and 98 kHz.
  const sentence = ladderSentence(sampleLadder, { min: 60_000, max: 100_000 });
  expect(sentence).toMatch(/^Of 6 settings, 5 stay in the supply’s band cold and hot and 3 meet every limit/);
  expect(sentence).toMatch(/advised is 6 units, at 80\.\d kHz hot/);
  expect(ladderSentence([], { min: null, max: null })).toBe('The ladder has no rows yet.');
});

describe('the power chain', () => {
  test('starts with what leaves the inverter and ends with what arrives in the part', () => {
    const { total, bars } = chainBars(sampleChain);
    const lost = bars.filter((bar) => !bar.arrives).reduce((sum, bar) => sum + bar.power, 0);
    expect(total).toBe(15_000);
    expect(bars.at(-1)?.arrives).toBe(true);
    expect(lost + (bars.at(-1)?.power ?? 0)).toBeCloseTo(total, 6);
    expect(bars.find((bar) => bar.name === 'Coil')?.after).toBeCloseTo(bars.at(-1)?.power ?? 0, 6);
  });

  test('without a step for the whole, the total is the sum of losses and what arrives', () => {
    expect(chainBars(sampleChain.filter((step) => step.name !== 'inverter')).total).toBeCloseTo(15_000, 6);
  });

  test('says where most is lost', () => {
    expect(chainSentence(sampleChain)).toBe(
      'Of 15.0 kW from the inverter, 11.4 kW (76.0 %) arrive in the part; most is lost in: coil (16.0 %).',
    );
    expect(chainSentence([])).toBe('The power chain has no figures yet.');
  });
});

test('the time to a level lies between the samples around it', () => {
  expect(timeAt([0, 1, 2], [20, 420, 820], 620)).toBeCloseTo(1.5, 12);
  expect(timeAt([0, 1], [20, 40], 900)).toBeNull();
  expect(timeAt([0, 1], [950, 960], 900)).toBe(0);
});

test('spread keeps both ends and never exceeds its count', () => {
  expect(spread(3, 10)).toEqual([0, 1, 2]);
  expect(spread(401, 5)).toEqual([0, 100, 200, 300, 400]);
});
