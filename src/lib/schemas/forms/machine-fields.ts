/** The fields of a machine. Paths are those of the API's machine, under `machine.`. */
import {
  choice,
  count,
  plain,
  quantity,
  special,
  text,
  type FieldGroupSpec,
  type FieldSpec,
  type Values,
} from './field-spec.ts';

const notKnown = { empty: 'not-known' } as const;
const none = { empty: 'none' } as const;

export const mostGroups = 6;
export const mostTotals = 12;

const isPushPull = (v: Values) => v['machine.tank'] === 'push-pull';
const isChokeFed = (v: Values) => isPushPull(v) || v['machine.tank'] === 'choke-parallel';
const hasTransformer = (v: Values) => v['machine.hasTransformer'] === 'yes';
const hasConnection = (v: Values) => (v['machine.connection.kind'] ?? '') !== '';
const isCalibrated = (v: Values) => v['machine.isCalibrated'] === 'yes';
const byGroups = (v: Values) => v['machine.bank.kind'] !== 'totals';
const byTotals = (v: Values) => v['machine.bank.kind'] === 'totals';

/** How many rows of a list the form holds; at least one. */
export function rowCount(values: Values, path: string, most: number): number {
  const typed = Number(values[`${path}.rows`] ?? '1');
  return Number.isInteger(typed) ? Math.min(Math.max(typed, 1), most) : 1;
}

export const supplyGroup: FieldGroupSpec = {
  title: 'Supply',
  lead: 'Limits are those at the inverter output, as on its plate. Leave empty what is not known: a stated default with a wide band is used.',
  fields: [
    text('machine.name', 'Name of the machine', 120, {
      empty: 'required',
      hint: 'As your people call it, e.g. “Hardening cell 2”.',
    }),
    choice(
      'machine.tank',
      'Tank circuit',
      [
        ['series', 'Series: bank and coil one after the other'],
        ['parallel', 'Parallel: bank across the coil'],
        ['choke-parallel', 'Series choke feeding a parallel tank'],
        ['push-pull', 'Centre-tapped, self-resonant push-pull'],
        ['not-known', 'Not known'],
      ],
      { initial: 'not-known' },
    ),
    quantity('machine.supply.frequencyMin', 'Lowest frequency', 'frequency', notKnown),
    quantity('machine.supply.frequencyMax', 'Highest frequency', 'frequency', notKnown),
    quantity('machine.supply.ratedPower', 'Rated power', 'power', notKnown),
    quantity('machine.supply.voltageLimit', 'Voltage limit', 'voltage', {
      ...notKnown,
      hint: 'V rms at the inverter output.',
    }),
    quantity('machine.supply.currentLimit', 'Current limit', 'current', {
      ...notKnown,
      hint: 'A rms at the inverter output.',
    }),
    quantity('machine.supply.dcVoltage', 'DC supply voltage', 'voltage', { ...notKnown, when: isPushPull }),
    quantity('machine.supply.devicePeakVoltage', 'Peak voltage rating of one device', 'voltage', {
      ...notKnown,
      when: isPushPull,
    }),
    quantity('machine.supply.chokeInductance', 'Choke inductance', 'inductance', {
      ...notKnown,
      when: isChokeFed,
    }),
    quantity('machine.supply.chokeSaturationCurrent', 'Choke saturation current', 'current', {
      ...notKnown,
      when: isChokeFed,
    }),
  ],
};

export const transformerGroup: FieldGroupSpec = {
  title: 'Output transformer',
  fields: [
    choice(
      'machine.hasTransformer',
      'Output transformer',
      [
        ['no', 'None'],
        ['yes', 'There is one'],
      ],
      { initial: 'no' },
    ),
    special('numbers', 'machine.transformer.ratios', 'Ratio taps', {
      empty: 'required',
      when: hasTransformer,
      hint: 'Primary turns per secondary turn, one after the other: 6; 8; 10; 12.',
    }),
    plain('machine.transformer.fitted', 'Ratio connected now', '', 1, {
      when: hasTransformer,
      hint: 'One of the taps.',
    }),
    choice(
      'machine.transformer.bankSide',
      'The capacitor bank is on the',
      [
        ['primary', 'primary side (inverter)'],
        ['secondary', 'secondary side (coil)'],
      ],
      { when: hasTransformer, initial: 'primary' },
    ),
    quantity('machine.transformer.leakageInductance', 'Leakage inductance', 'inductance', {
      ...notKnown,
      when: hasTransformer,
      hint: 'Referred to the primary.',
    }),
    quantity('machine.transformer.magnetisingInductance', 'Magnetising inductance', 'inductance', {
      ...notKnown,
      when: hasTransformer,
      hint: 'Seen from the primary.',
    }),
    quantity('machine.transformer.windingResistance', 'Winding resistance', 'resistance', {
      ...notKnown,
      when: hasTransformer,
      hint: 'Referred to the primary.',
    }),
    plain('machine.transformer.voltsPerHertzLimit', 'Volts per hertz limit', 'V/Hz', 1, {
      ...notKnown,
      when: hasTransformer,
    }),
    quantity('machine.transformer.apparentPowerLimit', 'Apparent power limit', 'apparent-power', {
      ...notKnown,
      when: hasTransformer,
    }),
  ],
};

export const fixedGroup: FieldGroupSpec = {
  title: 'Bus and head',
  lead: 'What lies between the bank (or the transformer) and the coil terminals.',
  fields: [
    quantity('machine.fixed.inductance', 'Fixed inductance', 'inductance', notKnown),
    quantity('machine.fixed.inductanceBand', 'Its band, ±', 'fraction', notKnown),
    quantity('machine.fixed.resistance', 'Fixed resistance', 'resistance', notKnown),
    quantity(
      'machine.fixed.strayCapacitance',
      'Capacitance across the tank, outside the bank',
      'capacitance',
      notKnown,
    ),
    choice(
      'machine.isCalibrated',
      'Was the machine calibrated?',
      [
        ['no', 'No'],
        ['yes', 'Yes'],
      ],
      { initial: 'no' },
    ),
    special('date', 'machine.fixed.calibration.date', 'Date of calibration', {
      empty: 'required',
      when: isCalibrated,
    }),
    text('machine.fixed.calibration.method', 'How it was calibrated', 200, {
      empty: 'required',
      when: isCalibrated,
    }),
  ],
};

export const bankKindField = choice(
  'machine.bank.kind',
  'The capacitor bank is',
  [
    ['groups', 'made up of equal units that can be fitted or taken off'],
    ['totals', 'a list of totals to choose from'],
  ],
  { initial: 'groups' },
);

export function bankGroupFields(index: number): FieldSpec[] {
  const at = (name: string) => `machine.bank.groups.${index}.${name}`;
  const when = byGroups;
  return [
    quantity(at('unitCapacitance'), 'Capacitance of one unit', 'capacitance', { when }),
    quantity(at('tolerance'), 'Tolerance, ±', 'fraction', { when, initial: '5 %' }),
    count(at('count'), 'Units owned', { when }),
    count(at('positions'), 'Places on the machine', { when }),
    count(at('unitsInSeries'), 'Units in series per string', {
      when,
      initial: '1',
      hint: '1 = all in parallel.',
    }),
    count(at('fitted'), 'Units fitted now', { when }),
    quantity(at('unitVoltageLimit'), 'Voltage limit of a unit', 'voltage', { ...notKnown, when }),
    quantity(at('unitCurrentLimit'), 'Current limit of a unit', 'current', { ...notKnown, when }),
    quantity(at('unitReactivePowerLimit'), 'Reactive power limit of a unit', 'reactive-power', {
      ...notKnown,
      when,
    }),
    plain(at('lossTangent'), 'Loss tangent', '', 1, { ...notKnown, when }),
  ];
}

export function bankTotalFields(index: number): FieldSpec[] {
  const at = (name: string) => `machine.bank.totals.${index}.${name}`;
  const when = byTotals;
  return [
    text(at('label'), 'Position', 80, { empty: 'required', when }),
    quantity(at('capacitance'), 'Capacitance', 'capacitance', { when }),
    quantity(at('tolerance'), 'Tolerance, ±', 'fraction', { when, initial: '5 %' }),
    { kind: 'flag', path: at('fitted'), label: 'Connected now', empty: 'none', when },
    quantity(at('voltageLimit'), 'Voltage limit', 'voltage', { ...notKnown, when }),
    quantity(at('currentLimit'), 'Current limit', 'current', { ...notKnown, when }),
    quantity(at('reactivePowerLimit'), 'Reactive power limit', 'reactive-power', { ...notKnown, when }),
  ];
}

export const waterGroup: FieldGroupSpec = {
  title: 'Water',
  fields: [
    quantity('machine.water.inletTemperatureC', 'Inlet temperature', 'temperature', notKnown),
    quantity('machine.water.supplyPressure', 'Supply pressure', 'pressure', notKnown),
    quantity('machine.water.returnPressure', 'Return pressure', 'pressure', notKnown),
    quantity('machine.water.flow', 'Flow to the coil', 'flow', {
      ...notKnown,
      hint: 'Where it is known instead of the pressures.',
    }),
    quantity('machine.water.outletLimitC', 'Outlet limit', 'temperature', notKnown),
    quantity('machine.water.interlockFlow', 'Smallest flow of the interlock', 'flow', notKnown),
  ],
};

export const connectionGroup: FieldGroupSpec = {
  title: 'Coil connection',
  fields: [
    choice(
      'machine.connection.kind',
      'Kind of connection',
      [
        ['plate', 'Plate'],
        ['blade', 'Blade'],
        ['quick-change', 'Quick-change'],
        ['custom', 'Custom'],
      ],
      notKnown,
    ),
    quantity('machine.connection.centreDistance', 'Centre distance', 'length', {
      ...none,
      when: hasConnection,
    }),
    quantity('machine.connection.contactWidth', 'Contact face, width', 'length', {
      ...none,
      when: hasConnection,
    }),
    quantity('machine.connection.contactHeight', 'Contact face, height', 'length', {
      ...none,
      when: hasConnection,
    }),
    text('machine.connection.waterPorts', 'Water ports', 200, { when: hasConnection }),
    text('machine.connection.note', 'Note', 1000, { when: hasConnection, rows: 3 }),
  ],
};

/** The bank's rows as groups, as many as the form holds. */
export function bankGroups(values: Values): FieldGroupSpec[] {
  if (byTotals(values)) {
    return Array.from({ length: rowCount(values, 'machine.bank.totals', mostTotals) }, (_, index) => ({
      title: `Position ${index + 1} of the bank`,
      fields: bankTotalFields(index),
    }));
  }
  return Array.from({ length: rowCount(values, 'machine.bank.groups', mostGroups) }, (_, index) => ({
    title: `Capacitor group ${index + 1}`,
    fields: bankGroupFields(index),
  }));
}

/** Every group of the machine's form, in order. */
export function machineGroups(values: Values): FieldGroupSpec[] {
  return [
    supplyGroup,
    transformerGroup,
    fixedGroup,
    { title: 'Capacitor bank', fields: [bankKindField] },
    ...bankGroups(values),
    waterGroup,
    connectionGroup,
  ];
}
