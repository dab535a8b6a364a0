/**
 * The standing cautions of the trade, in one place, so that screens, papers and mails say the same.
 * They remind people who are trained for this work; they replace no training.
 */
export interface Caution {
  title: string;
  text: string;
}

/** One sentence for footers and small panels. */
export const shortCaution =
  'the figures are estimates for ordering, to be confirmed on the machine by qualified people. Local codes, the supply maker’s limits and licensed practice come first.';

export const cautions: readonly Caution[] = [
  {
    title: 'Voltage',
    text: 'Tanks hold lethal voltage and give deep high-frequency burns. Isolate, lock out, discharge the capacitors and prove them dead before touching coil, bus or bank.',
  },
  {
    title: 'Field',
    text: 'Strong fields near the coil heat rings, watches and tools. People with implants keep out until their doctor has said otherwise.',
  },
  {
    title: 'Cooling water',
    text: 'A coil without water fails in seconds. Prove flow and interlock before power, and after every change of coil.',
  },
  {
    title: 'Hot parts and steam',
    text: 'Parts stay hot after the glow has gone. Water trapped in a hot tube turns to steam: open nothing under pressure.',
  },
  {
    title: 'Brazing',
    text: 'Fume and flux need extraction and eye protection. No filler with cadmium.',
  },
  {
    title: 'Pressure tests',
    text: 'Test with water, not air, behind a shield, and let nobody stand in line with plugs and joints.',
  },
  {
    title: 'Fixtures',
    text: 'Materials near the coil can heat, char or give off fume. Keep closed metal loops out of the field.',
  },
];

/** What the figures are, and are not. */
export const standing =
  'The figures are estimates for ordering, to be confirmed on the machine by qualified people. Local codes, the supply maker’s limits and licensed practice come first. The check predicts heat, never hardness.';
