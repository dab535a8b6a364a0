/**
 * `npm run load:physics`: what the physics costs, as JSON lines on standard output; not a test, nothing fails.
 * Arguments pick tasks by a part of their name: `npm run load:physics -- check`.
 *
 * Every task gives its first call in this process and the median of warm calls. `cpu` is the processor time of the
 * process in ms (other load on the machine does not count), `wall` the time that passed. `target` is the time asked
 * for on one core, ms. A helix is moved a little before each call, so that nothing is answered from what is kept.
 */
import process from 'node:process';
import { checkRequirement } from '../../src/lib/induction/check/check-requirement.ts';
import { exampleRequirement } from '../../src/lib/induction/check/examples.ts';
import { heatingInputOf } from '../../src/lib/induction/check/heating-run.ts';
import { proposeCandidates } from '../../src/lib/induction/check/propose.ts';
import type { Requirement, SolverSetting } from '../../src/lib/induction/check/types.ts';
import { solveImpedance } from '../../src/lib/induction/field/solve-impedance.ts';
import { runHeating } from '../../src/lib/induction/heating/run-heating.ts';
import { methodVersion } from '../../src/lib/induction/version.ts';

interface Task {
  name: string;
  /** ms on one core; null where none is set. */
  target: number | null;
  warmCalls: number;
  /** Does the work; what it returns goes into the line. */
  run: (call: number) => Record<string, unknown> | void;
}

type Kind = 'non-magnetic' | 'hot' | 'cold-steel';

/**
 * The example (a C45 shaft): as it is, its cold core is magnetic. `hot` heats it through from above Curie,
 * `non-magnetic` makes it of 304.
 */
function requirementOf(kind: Kind, call: number): Requirement {
  const requirement = exampleRequirement();
  const { winding } = requirement.coil;
  if (winding.shape === 'helix' && winding.insideDiameter !== null) winding.insideDiameter += call * 1e-6;
  if (kind === 'non-magnetic') requirement.part.material = { kind: 'library', id: 'stainless-304' };
  if (kind === 'hot') {
    requirement.part.depthWanted = null;
    requirement.process.startTemperatureC = 800;
    requirement.process.targetTemperatureC = 1150;
    requirement.process.highestSurfaceTemperatureC = 1250;
  }
  return requirement;
}

function impedance(setting: SolverSetting, turns: number, call: number, kind: Kind): Record<string, unknown> {
  const { coil, part } = requirementOf(kind, call);
  if (coil.winding.shape === 'helix') coil.winding.turns = turns;
  const { inductance } = solveImpedance({
    coil,
    part,
    frequency: 2e4,
    state: 'cold',
    startTemperatureC: 20,
    targetTemperatureC: 880,
    current: 500,
    includeLeads: true,
    setting,
  });
  return { inductance };
}

function check(setting: SolverSetting, kind: Kind, call: number, bands = true): Record<string, unknown> {
  let solutions = 0;
  const result = checkRequirement(requirementOf(kind, call), {
    setting,
    bands,
    onProgress: () => void (solutions += 1),
  });
  return {
    solutions: solutions - 1,
    rows: result.ladder.length,
    frequency: result.tank?.operatingFrequency.value ?? null,
  };
}

function transient(call: number): Record<string, unknown> {
  const requirement = requirementOf('cold-steel', call);
  requirement.process.time = 20;
  const first = checkRequirement(requirement, { setting: 'preview', bands: false });
  const answer = heatingInputOf(requirement, first, {
    drive: { kind: 'power', power: 15e3 },
    frequency: null,
    duration: 20,
    setting: 'default',
  });
  if (!answer.ok) throw new Error(answer.message);
  const before = process.cpuUsage();
  const result = runHeating(answer.input);
  const { user, system } = process.cpuUsage(before);
  return {
    cpuWithoutCheck: Math.round((user + system) / 1000),
    end: result.end,
    time: result.time,
    steps: result.steps,
    fieldSolutions: result.fieldSolutions,
  };
}

function propose(call: number): Record<string, unknown> {
  const requirement = requirementOf('cold-steel', call);
  if (requirement.coil.winding.shape === 'helix') requirement.coil.winding.turns = null;
  return { candidates: proposeCandidates(requirement).candidates.length };
}

const kinds: readonly Kind[] = ['non-magnetic', 'hot', 'cold-steel'];
const tasks: Task[] = [
  {
    name: 'impedance preview, five turns',
    target: 10,
    warmCalls: 101,
    run: (i) => impedance('preview', 5, i, 'non-magnetic'),
  },
  {
    name: 'impedance default, five turns',
    target: 40,
    warmCalls: 15,
    run: (i) => impedance('default', 5, i, 'non-magnetic'),
  },
  {
    name: 'impedance default, five turns, cold steel',
    target: null,
    warmCalls: 7,
    run: (i) => impedance('default', 5, i, 'cold-steel'),
  },
  {
    name: 'impedance default, twelve turns',
    target: null,
    warmCalls: 7,
    run: (i) => impedance('default', 12, i, 'non-magnetic'),
  },
  ...kinds.flatMap((kind): Task[] => [
    {
      name: `check preview, nominal, ${kind}`,
      target: null,
      warmCalls: 5,
      run: (i) => check('preview', kind, i, false),
    },
    {
      name: `check preview, bands and ladder, ${kind}`,
      target: null,
      warmCalls: 5,
      run: (i) => check('preview', kind, i),
    },
    {
      name: `check default, bands and ladder, ${kind}`,
      target: kind === 'cold-steel' ? 2000 : 600,
      warmCalls: 3,
      run: (i) => check('default', kind, i),
    },
  ]),
  { name: 'propose, cold steel, turns open', target: 5000, warmCalls: 1, run: propose },
  { name: 'transient of 20 s, cold steel', target: 8000, warmCalls: 1, run: transient },
];

function timed(run: () => Record<string, unknown> | void) {
  const cpuBefore = process.cpuUsage();
  const before = performance.now();
  const detail = run() ?? {};
  const wall = performance.now() - before;
  const { user, system } = process.cpuUsage(cpuBefore);
  return { cpu: (user + system) / 1000, wall, detail };
}

const round = (ms: number) => Number(ms.toPrecision(3));
const median = (list: number[]) => [...list].sort((a, b) => a - b)[Math.floor(list.length / 2)] ?? Number.NaN;
const say = (line: Record<string, unknown>) => void process.stdout.write(`${JSON.stringify(line)}\n`);

const wanted = process.argv.slice(2);
say({ method: methodVersion, node: process.version, platform: `${process.platform} ${process.arch}` });
for (const task of tasks) {
  if (wanted.length > 0 && !wanted.some((word) => task.name.includes(word))) continue;
  const first = timed(() => task.run(0));
  const warm = Array.from({ length: task.warmCalls }, (_, i) => timed(() => task.run(i + 1)));
  say({
    task: task.name,
    target: task.target,
    first: { cpu: round(first.cpu), wall: round(first.wall) },
    warm: {
      cpu: round(median(warm.map((one) => one.cpu))),
      wall: round(median(warm.map((one) => one.wall))),
    },
    calls: warm.length,
    ...warm[warm.length - 1]?.detail,
  });
}
const { rss, heapUsed, arrayBuffers } = process.memoryUsage();
const mebibytes = (bytes: number) => Math.round(bytes / 2 ** 20);
say({
  memory: 'MiB at the end',
  rss: mebibytes(rss),
  heapUsed: mebibytes(heapUsed),
  arrayBuffers: mebibytes(arrayBuffers),
  largestRss: Math.round(process.resourceUsage().maxRSS / 1024),
});
