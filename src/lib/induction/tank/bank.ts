/** Bank arrangements: every total that the owned units and places allow, and what one unit then carries. */
import type { Bank, BankGroup } from '../check/types.ts';

export interface Arrangement {
  id: string;
  label: string;
  /** F */
  capacitance: number;
  /** Half width of its band, as a fraction: the groups' tolerances weighted by capacitance. */
  tolerance: number;
  lossTangent: number;
  /** Units fitted per group; empty for listed totals. */
  unitsPerGroup: number[];
  fitted: boolean;
  /** Parts of the bank that carry current, each with what one of its units is allowed. */
  parts: ArrangementPart[];
}

export interface ArrangementPart {
  name: string;
  /** Path of the group or total in the requirement. */
  field: string;
  capacitance: number;
  unitsInSeries: number;
  strings: number;
  voltageLimit: number | null;
  currentLimit: number | null;
  reactivePowerLimit: number | null;
}

export interface UnitStress {
  part: ArrangementPart;
  voltage: number;
  current: number;
  reactivePower: number;
}

/** Film capacitors for heating: 2 to 10·10⁻⁴ between 10 and 200 kHz (from memory; IEC 60110-1 names the test). */
export const defaultLossTangent = 5e-4;
/** Rows are limited so that the ladder can be read; the fitted row always stays. */
export const mostArrangements = 48;

/** Capacitance of n_p strings of n_s equal units, C·n_p/n_s. */
export function groupCapacitance(unit: number, units: number, unitsInSeries: number): number {
  return (unit * Math.floor(units / unitsInSeries)) / unitsInSeries;
}

/** Places a group can use, in whole strings. */
function mostUnits(group: BankGroup): number {
  const most = Math.min(group.count, group.positions);
  return most - (most % group.unitsInSeries);
}

/**
 * All bank settings in rising capacitance. Groups: 1 … positions units each in whole strings (0 only while another
 * group is fitted); totals: as listed. More than `most` settings are thinned evenly in ln C; the fitted one stays.
 */
export function arrangements(bank: Bank, most = mostArrangements): Arrangement[] {
  const all = bank.kind === 'totals' ? fromTotals(bank) : fromGroups(bank.groups);
  all.sort((a, b) => a.capacitance - b.capacitance);
  return thin(all, most);
}

function fromTotals(bank: Extract<Bank, { kind: 'totals' }>): Arrangement[] {
  return bank.totals.map((total, index) => ({
    id: `total-${index}`,
    label: total.label || `Total ${index + 1}`,
    capacitance: total.capacitance,
    tolerance: total.tolerance,
    lossTangent: defaultLossTangent,
    unitsPerGroup: [],
    fitted: total.fitted,
    parts: [
      {
        name: total.label || `total ${index + 1}`,
        field: `machine.bank.totals.${index}`,
        capacitance: total.capacitance,
        unitsInSeries: 1,
        strings: 1,
        voltageLimit: total.voltageLimit,
        currentLimit: total.currentLimit,
        reactivePowerLimit: total.reactivePowerLimit,
      },
    ],
  }));
}

function fromGroups(groups: readonly BankGroup[]): Arrangement[] {
  let settings: number[][] = [[]];
  for (const group of groups) {
    const step = group.unitsInSeries;
    const choices: number[] = [];
    for (let units = groups.length > 1 ? 0 : step; units <= mostUnits(group); units += step)
      choices.push(units);
    if (group.fitted > 0 && !choices.includes(group.fitted) && group.fitted % step === 0)
      choices.push(group.fitted);
    settings = settings.flatMap((before) => choices.map((units) => [...before, units]));
    // A bank of many groups has more settings than anyone tries: keep the product within reach.
    if (settings.length > 4000)
      settings = settings.filter((_, i) => i % Math.ceil(settings.length / 4000) === 0);
  }
  const fittedUnits = groups.map((group) => group.fitted);
  if (fittedUnits.some((units) => units > 0) && !settings.some((s) => same(s, fittedUnits)))
    settings.push(fittedUnits);
  return settings.filter((units) => units.some((n) => n > 0)).map((units) => arrangementOf(groups, units));
}

function same(a: readonly number[], b: readonly number[]): boolean {
  return a.length === b.length && a.every((value, index) => value === b[index]);
}

/** The setting with the given units per group. */
export function arrangementOf(groups: readonly BankGroup[], units: number[]): Arrangement {
  const parts: ArrangementPart[] = [];
  let tolerance = 0;
  let loss = 0;
  groups.forEach((group, index) => {
    const fitted = units[index] ?? 0;
    const strings = Math.floor(fitted / group.unitsInSeries);
    if (strings === 0) return;
    const capacitance = groupCapacitance(group.unitCapacitance, fitted, group.unitsInSeries);
    tolerance += group.tolerance * capacitance;
    loss += (group.lossTangent ?? defaultLossTangent) * capacitance;
    parts.push({
      name: groups.length > 1 ? `group ${index + 1}` : 'bank',
      field: `machine.bank.groups.${index}`,
      capacitance,
      unitsInSeries: group.unitsInSeries,
      strings,
      voltageLimit: group.unitVoltageLimit,
      currentLimit: group.unitCurrentLimit,
      reactivePowerLimit: group.unitReactivePowerLimit,
    });
  });
  const capacitance = parts.reduce((sum, part) => sum + part.capacitance, 0);
  return {
    id: `units-${units.join('-')}`,
    label:
      groups.length > 1 ? `${units.join(' + ')} units` : `${units[0]} ${units[0] === 1 ? 'unit' : 'units'}`,
    capacitance,
    tolerance: capacitance > 0 ? tolerance / capacitance : 0,
    lossTangent: capacitance > 0 ? loss / capacitance : defaultLossTangent,
    unitsPerGroup: units,
    fitted: groups.every((group, index) => (units[index] ?? 0) === group.fitted),
    parts,
  };
}

function thin(rows: Arrangement[], most: number): Arrangement[] {
  const different: Arrangement[] = [];
  for (const row of rows) {
    const last = different.at(-1);
    // Two settings of the same total: the fitted one stands for both.
    if (last && Math.abs(row.capacitance / last.capacitance - 1) < 1e-6) {
      if (row.fitted) different[different.length - 1] = row;
    } else different.push(row);
  }
  if (different.length <= most) return different;
  const low = Math.log(different[0]?.capacitance ?? 1);
  const high = Math.log(different.at(-1)?.capacitance ?? 1);
  const kept = new Set<Arrangement>(different.filter((row) => row.fitted));
  for (let i = 0; i < most; i++) {
    const wanted = low + ((high - low) * i) / Math.max(1, most - 1);
    const best = different.reduce((a, b) =>
      Math.abs(Math.log(b.capacitance) - wanted) < Math.abs(Math.log(a.capacitance) - wanted) ? b : a,
    );
    kept.add(best);
  }
  return different.filter((row) => kept.has(row));
}

/**
 * What one unit of each part carries: strings share the bank's current by capacitance, units in series share its
 * voltage.
 */
export function unitStress(arrangement: Arrangement, bankVoltage: number, bankCurrent: number): UnitStress[] {
  return arrangement.parts.map((part) => {
    const voltage = bankVoltage / part.unitsInSeries;
    // Without capacitance no unit carries current; 0/0 would put a not-a-number into the ladder.
    const share = arrangement.capacitance > 0 ? part.capacitance / arrangement.capacitance : 0;
    const current = (bankCurrent * share) / part.strings;
    return { part, voltage, current, reactivePower: voltage * current };
  });
}
