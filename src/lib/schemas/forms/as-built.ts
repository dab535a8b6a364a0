import type { AsBuiltBody, AsBuiltValue } from '../../domain/as-built.ts';
import type { AcceptanceLine } from '../../induction/check/types.ts';
import { dimensionOfUnit, type UnitSet } from '../../induction/units/dimensions.ts';
import { parseQuantity } from '../../induction/units/parse-quantity.ts';

/** Whether a line takes a measured value (others are a test or a paper, ticked). */
export function isMeasured(line: Pick<AcceptanceLine, 'low' | 'high'>): boolean {
  return line.low !== null || line.high !== null;
}

type Fields = Record<string, string>;

function text(form: FormData, name: string, max = 300): string {
  const value = form.get(name);
  return typeof value === 'string' ? value.trim().slice(0, max) : '';
}

function measured(
  form: FormData,
  line: AcceptanceLine,
  unitSet: UnitSet,
  fields: Fields,
): Pick<AsBuiltValue, 'value' | 'uncertainty'> {
  const dimension = dimensionOfUnit[line.unit];
  const typed = text(form, `value-${line.id}`);
  const value = parseQuantity(typed, dimension, unitSet);
  if (!value.ok) fields[`value-${line.id}`] = `${line.label}: ${value.message}`;
  const typedUncertainty = text(form, `uncertainty-${line.id}`);
  if (typedUncertainty === '') return { value: value.ok ? value.value : null, uncertainty: 0 };
  const share = /^(\d+(?:[.,]\d+)?)\s*%$/.exec(typedUncertainty);
  if (share?.[1]) {
    const fraction = Number(share[1].replace(',', '.')) / 100;
    return value.ok
      ? { value: value.value, uncertainty: Math.abs(value.value) * fraction }
      : { value: null, uncertainty: 0 };
  }
  const uncertainty = parseQuantity(typedUncertainty, dimension, unitSet);
  if (!uncertainty.ok || uncertainty.value < 0) {
    fields[`uncertainty-${line.id}`] =
      `${line.label}: ${uncertainty.ok ? 'The uncertainty is not below zero.' : uncertainty.message}`;
  }
  return { value: value.ok ? value.value : null, uncertainty: uncertainty.ok ? uncertainty.value : 0 };
}

/** Reads an as-built record: per line value and uncertainty (a quantity, or a share such as "0.5 %"), or its tick. */
export function readAsBuilt(
  form: FormData,
  lines: readonly AcceptanceLine[],
  unitSet: UnitSet,
): { body: AsBuiltBody; fields: Fields } {
  const fields: Fields = {};
  const values = lines.map((line): AsBuiltValue => {
    const common = {
      lineId: line.id,
      instrument: text(form, `instrument-${line.id}`, 120),
      calibrationDate: text(form, `calibration-${line.id}`, 10),
      note: text(form, `note-${line.id}`),
    };
    if (isMeasured(line)) return { ...common, passed: null, ...measured(form, line, unitSet, fields) };
    const answer = text(form, `passed-${line.id}`);
    if (answer !== 'yes' && answer !== 'no') fields[`passed-${line.id}`] = `${line.label}: choose yes or no.`;
    return { ...common, value: null, uncertainty: 0, passed: answer === '' ? null : answer === 'yes' };
  });
  const optional = (name: string, dimension: 'frequency' | 'temperature'): number | null => {
    const typed = text(form, name);
    if (typed === '') return null;
    const read = parseQuantity(typed, dimension, unitSet);
    if (!read.ok) fields[name] = read.message;
    return read.ok ? read.value : null;
  };
  const measuredOn = text(form, 'measuredOn', 10);
  if (!/^\d{4}-\d{2}-\d{2}$/.test(measuredOn)) fields['measuredOn'] = 'Enter the day of the measurement.';
  const body: AsBuiltBody = {
    values,
    testFrequency: optional('testFrequency', 'frequency'),
    temperatureC: optional('temperature', 'temperature'),
    leadState: text(form, 'leadState'),
    compensation: text(form, 'compensation'),
    measuredOn,
    note: text(form, 'note', 2000),
  };
  return { body, fields };
}
