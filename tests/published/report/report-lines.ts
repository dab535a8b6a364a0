/** From the lines the tests write to the record of the accuracy page and to a text for reading. */
import type { AccuracyGroupId } from '../../../src/lib/features/accuracy/accuracy-groups.ts';
import { accuracyGroups, comparisons } from '../../../src/lib/features/accuracy/accuracy-groups.ts';
import type { Accuracy, AccuracyCheck, SourceChecks } from '../../../src/lib/features/accuracy/accuracy.ts';

export interface ReportLine extends AccuracyCheck {
  subject: string;
  source: string;
  standing: string;
  met: boolean;
}

const bySubject: Record<string, AccuracyGroupId> = {
  'check-safety': 'exposure',
  'check-tank': 'circuits',
  'check-tube': 'tube',
  'check-water': 'water',
  filaments: 'filaments',
  heating: 'heating',
  materials: 'materials',
};

/** First that fits; subjects outside the table and ids outside this list are an error. */
const byId: [start: RegExp, group: AccuracyGroupId][] = [
  [/^(D-T2|mur_)/, 'steel'],
  [/^(A3|B)-/, 'coil-alone'],
  [/^[CD]-/, 'coil-with-part'],
  [/^(E\d-|p_|q_|skin_round_|tube_|wall_rule_|delta_)/, 'closed-solutions'],
  [
    /^(G-|maxwell_|grover_|nagaoka_|sheet_|rosa_|spiral_|ring_|loop_|leads_|rect_|square_|medhurst_)/,
    'inductance',
  ],
];

export function groupOf(subject: string, id: string): AccuracyGroupId {
  const group =
    (id.startsWith('mur_') ? 'steel' : bySubject[subject]) ?? byId.find(([start]) => start.test(id))?.[1];
  if (group === undefined) throw new Error(`${subject}: ${id} has no group; add it in report-lines.ts`);
  return group;
}

/** References to the line before, as handbooks write them, written out. */
const sourceText: Record<string, string> = {
  'as above': 'centre-tap volt-second balance',
  'as p': 'Baker 1957 / Davies & Simpson 1979 functions; evaluated',
};

const words = (quantity: string) => quantity.replaceAll('_', ' ');

/** Digits that are the same on every machine. */
const rounded = (value: number, digits: number) => Number(value.toPrecision(digits));

const inOrder = new Intl.Collator('en', { numeric: true }).compare;

/** Sorted, so that the same results always give the same file. */
export function recordOf(methodVersion: string, lines: readonly ReportLine[]): Accuracy {
  const known = new Map<string, SourceChecks>();
  for (const line of lines) {
    const group = groupOf(line.subject, line.id);
    const source = sourceText[line.source] ?? line.source;
    const key = JSON.stringify([group, source, line.standing]);
    const one = known.get(key) ?? { group, source, standing: line.standing, checks: [] };
    known.set(key, one);
    const { id, tolerance } = line;
    const [value, expected] = [rounded(line.value, 8), rounded(line.expected, 8)];
    // What rounding leaves of an exact agreement differs between machines.
    const exact = Math.abs(line.difference) < 1e-12 * Math.abs(line.expected);
    const difference = exact ? 0 : rounded(line.difference, 3);
    one.checks.push({ id, quantity: words(line.quantity), value, expected, difference, tolerance });
  }
  const place = (group: string) => accuracyGroups.findIndex((one) => one.id === group);
  const sources = [...known.values()].sort(
    (a, b) =>
      place(a.group) - place(b.group) || inOrder(a.source, b.source) || inOrder(a.standing, b.standing),
  );
  for (const one of sources)
    one.checks.sort((a, b) => inOrder(a.id, b.id) || inOrder(a.quantity, b.quantity) || a.value - b.value);
  return { methodVersion, sources };
}

/** One check a line: small, and differences between two versions can be read. */
export function recordText(record: Accuracy): string {
  const blocks = record.sources.map(({ checks, ...head }) => {
    const rows = checks.map((check) => JSON.stringify(check)).join(',\n');
    return `${JSON.stringify(head).slice(0, -1)},"checks":[\n${rows}]}`;
  });
  return `{"methodVersion":${JSON.stringify(record.methodVersion)},"sources":[\n${blocks.join(',\n')}]}\n`;
}

/** The same as a text with tables. */
export function reportText(record: Accuracy, failed: readonly ReportLine[]): string {
  const out = [`# Physics against the outside`, '', `Method ${record.methodVersion}.`, ''];
  if (failed.length > 0) {
    out.push('## Outside their tolerance', '');
    for (const line of failed)
      out.push(`- ${line.id}, ${line.quantity}: ${line.value}, expected ${line.expected} (${line.source})`);
    out.push('');
  }
  for (const group of accuracyGroups) {
    out.push(`## ${comparisons[group.comparison]}: ${group.title}`, '', group.proves, '');
    for (const one of record.sources.filter((s) => s.group === group.id)) {
      out.push(`${one.source} (${one.standing})`, '');
      out.push('| check | quantity | value | expected | difference | allowed |', '|---|---|---|---|---|---|');
      for (const c of one.checks) {
        const limit = 'rel' in c.tolerance ? `${100 * c.tolerance.rel} %` : String(c.tolerance.abs);
        out.push(`| ${c.id} | ${c.quantity} | ${c.value} | ${c.expected} | ${c.difference} | ${limit} |`);
      }
      out.push('');
    }
  }
  return out.join('\n');
}
