import type { Rule } from '../context.ts';
import type { Finding } from '../types.ts';
import { finding } from './finding.ts';

/** connection-missing: without it a coil cannot be fastened to the machine. */
export const missingConnection: Rule = (context) => {
  const { connection } = context.requirement.machine;
  const out: Finding[] = [];
  const say = (subject: string, what: string) =>
    out.push(
      finding({
        code: 'connection-missing',
        severity: 'blocker',
        subject,
        template: `The coil connection of the machine is not complete: ${what}.`,
        remedy: 'Enter it with the machine, or attach the drawing of the connection and describe it.',
        source: 'what a shop must know to build the coil',
      }),
    );
  if (!connection) say('machine.connection', 'it is not entered');
  else if (connection.kind === 'custom') {
    if (connection.note.trim() === '')
      say('machine.connection.note', 'a custom connection needs a note or drawing number');
  } else if (connection.centreDistance === null)
    say('machine.connection.centreDistance', 'the centre distance is missing');
  return out;
};

const questions = [
  ['windingDirection', 'the winding direction (right- or left-handed)'],
  ['leadExit', 'how the leads leave (axial, radial, tangential)'],
  ['leadAngleDeg', 'the angle between the leads'],
  ['upEnd', 'which end is up'],
  ['firstTurnFromFace', 'the first turn’s distance from the contact face'],
] as const;

/** handing-missing: one finding per answer that is missing, so that each links to its field. */
export const missingHanding: Rule = (context) => {
  const { handing, winding } = context.requirement.coil;
  if (winding.shape === 'drawing') return [];
  return questions
    .filter(([field]) => handing[field] === null)
    .map(([field, what]) =>
      finding({
        code: 'handing-missing',
        severity: 'blocker',
        subject: `coil.handing.${field}`,
        template: `Not stated: ${what}.`,
        remedy: 'Answer it from the machine: a coil of the wrong hand does not fit.',
        source: 'what a shop must know to build the coil',
      }),
    );
};
