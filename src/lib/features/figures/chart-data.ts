/** What the charts share: axis units, ticks, and the sentence each chart says about itself. Pure, no DOM. */
import type { ChainStep, LadderRow } from '../../induction/check/types.ts';

export interface AxisUnit {
  /** SI value × factor = figure on the axis. */
  factor: number;
  symbol: string;
}

/** The unit in which the largest value reads well (1 to 999). */
export function axisUnit(largest: number, symbol: 'Hz' | 'W' | 'V' | 'A'): AxisUnit {
  const steps: [number, string][] = [
    [1e6, 'M'],
    [1e3, 'k'],
    [1, ''],
    [1e-3, 'm'],
  ];
  const found = steps.find(([size]) => Math.abs(largest) >= size) ?? [1, ''];
  return { factor: 1 / found[0], symbol: `${found[1]}${symbol}` };
}

/** A number for an axis or a label: three significant digits, no exponent. */
export function plain(value: number): string {
  if (!Number.isFinite(value)) return '–';
  if (value === 0) return '0';
  const digits = Math.max(0, 2 - Math.floor(Math.log10(Math.abs(value))));
  return value.toFixed(Math.min(6, digits)).replace(/^-/, '−');
}

/** A round number of an axis, without the zeros that would feign precision. */
export function tickText(value: number): string {
  return String(Number(value.toPrecision(6))).replace(/^-/, '−');
}

/** A power with the unit in which it reads well: "450 W", "2.40 kW". */
export function powerText(watts: number): string {
  const unit = axisUnit(watts, 'W');
  return `${plain(watts * unit.factor)} ${unit.symbol}`;
}

/** Text of a CSV file; cells that a spreadsheet would run as a formula are quoted out of harm. */
export function csvOf(
  head: readonly string[],
  rows: readonly (readonly (string | number | null)[])[],
): string {
  const cell = (value: string | number | null) => {
    if (value === null) return '';
    if (typeof value === 'number') return Number.isFinite(value) ? String(value) : '';
    const safe = /^[=+\-@\t\r]/.test(value) ? `'${value}` : value;
    return /[",\n\r]/.test(safe) ? `"${safe.replaceAll('"', '""')}"` : safe;
  };
  return `${[head, ...rows].map((row) => row.map(cell).join(',')).join('\r\n')}\r\n`;
}

export interface SupplyBand {
  /** Hz; null is open to that side. */
  min: number | null;
  max: number | null;
}

/** Whether one thermal state of a row lies in the supply's band. */
export function inBand(frequency: number, band: SupplyBand): boolean {
  return (band.min === null || frequency >= band.min) && (band.max === null || frequency <= band.max);
}

const countOf = (count: number, one: string, many: string) =>
  `${count === 0 ? 'no' : count} ${count === 1 ? one : many}`;

/** One sentence about the ladder. */
export function ladderSentence(rows: readonly LadderRow[], band: SupplyBand): string {
  if (rows.length === 0) return 'The ladder has no rows yet.';
  const inside = rows.filter(
    (row) => inBand(row.hot.frequency.value, band) && inBand(row.cold.frequency.value, band),
  );
  const fits = rows.filter((row) => row.fits);
  const unit = axisUnit(Math.max(...rows.map((row) => row.hot.frequency.value)), 'Hz');
  const advised = rows.find((row) => row.advised);
  const lead = `Of ${countOf(rows.length, 'setting', 'settings')}, ${countOf(inside.length, 'stays', 'stay')} in the supply’s band cold and hot and ${countOf(fits.length, 'meets', 'meet')} every limit`;
  if (!advised) return `${lead}; none is advised.`;
  const power = axisUnit(advised.hot.deliverablePower.value, 'W');
  return `${lead}; advised is ${advised.label}, at ${plain(advised.hot.frequency.value * unit.factor)} ${unit.symbol} hot with ${plain(advised.hot.deliverablePower.value * power.factor)} ${power.symbol} deliverable.`;
}

export interface ChainBar {
  name: string;
  /** W lost here; for the part, what arrives. */
  power: number;
  low: number;
  high: number;
  share: number;
  /** W that go on to the next step. */
  after: number;
  arrives: boolean;
}

const chainNames: Record<ChainStep['name'], string> = {
  inverter: 'Inverter',
  transformer: 'Transformer',
  bank: 'Bank',
  bus: 'Bus and head',
  leads: 'Leads',
  coil: 'Coil',
  part: 'Part',
};

/**
 * The power chain as bars. An inverter step that carries the whole power is the start of the chain, not a
 * loss; the other steps lose their power, the part keeps what arrives.
 */
export function chainBars(chain: readonly ChainStep[]): { total: number; bars: ChainBar[] } {
  const source = chain.find((step) => step.name === 'inverter' && step.share >= 0.999);
  const losing = chain.filter((step) => step !== source);
  const total = source ? source.power.value : losing.reduce((sum, step) => sum + step.power.value, 0);
  let left = total;
  const bars = losing.map((step): ChainBar => {
    const arrives = step.name === 'part';
    if (!arrives) left -= step.power.value;
    const { value: power, low, high } = step.power;
    return {
      name: chainNames[step.name],
      power,
      low,
      high,
      share: step.share,
      after: arrives ? power : left,
      arrives,
    };
  });
  return { total, bars };
}

/** One sentence about the chain. */
export function chainSentence(chain: readonly ChainStep[]): string {
  const { total, bars } = chainBars(chain);
  const part = bars.find((bar) => bar.arrives);
  const losses = bars.filter((bar) => !bar.arrives);
  if (!part || total <= 0) return 'The power chain has no figures yet.';
  const worst = losses.reduce<ChainBar | null>(
    (most, bar) => (most === null || bar.power > most.power ? bar : most),
    null,
  );
  const unit = axisUnit(total, 'W');
  const arrives = `Of ${plain(total * unit.factor)} ${unit.symbol} from the inverter, ${plain(part.power * unit.factor)} ${unit.symbol} (${plain(part.share * 100)} %) arrive in the part`;
  return worst && worst.power > 0
    ? `${arrives}; most is lost in: ${worst.name.toLowerCase()} (${plain(worst.share * 100)} %).`
    : `${arrives}.`;
}

export interface TemperatureSeries {
  /** s, rising. */
  time: readonly number[];
  /** °C, as many as `time`. */
  surface: readonly number[];
  mean?: readonly number[];
  core?: readonly number[];
}

/** First time (s) at which a series reaches a level, between samples by straight line; null if never. */
export function timeAt(time: readonly number[], values: readonly number[], level: number): number | null {
  for (let i = 0; i < Math.min(time.length, values.length); i++) {
    const [value, at] = [values[i] as number, time[i] as number];
    if (value >= level) {
      if (i === 0) return at;
      const [before, start] = [values[i - 1] as number, time[i - 1] as number];
      return start + ((level - before) / (value - before)) * (at - start);
    }
  }
  return null;
}

/** At most `most` indices, evenly spread, first and last among them. */
export function spread(count: number, most: number): number[] {
  if (count <= most) return Array.from({ length: count }, (_, i) => i);
  return Array.from({ length: most }, (_, i) => Math.round((i * (count - 1)) / (most - 1)));
}
