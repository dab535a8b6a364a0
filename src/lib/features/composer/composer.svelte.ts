/** The composer: one form, its live check, and (for a draft) its place on the server. */
import { coilDrawing } from '$lib/drawing/coil-drawing.ts';
import { openFindings, type FindingAnswer } from '$lib/domain/finding-answers.ts';
import type {
  AcceptanceKind,
  AcceptanceLine,
  CheckResult,
  Finding,
  LadderRow,
  Machine,
} from '$lib/induction/check/types.ts';
import type { UnitSet } from '$lib/induction/units/dimensions.ts';
import { renderFinding } from '$lib/induction/units/render-finding.ts';
import { lineCount, mostLines, newLine } from '$lib/schemas/forms/acceptance-fields.ts';
import { machineValues } from '$lib/schemas/forms/machine-texts.ts';
import { readCommercial, readRequirement } from '$lib/schemas/forms/requirement-form.ts';
import {
  sectionIds,
  sectionOf,
  sectionText,
  type SectionId,
} from '$lib/schemas/forms/requirement-sections.ts';
import { acceptanceValues } from '$lib/schemas/forms/requirement-texts.ts';
import type { ContentsItem } from '$lib/ui/ContentsList.svelte';
import { fieldId, type SummaryLine } from '$lib/ui/form-errors.ts';
import { drawingInput } from './drawing-input.ts';
import type { DraftSync } from './draft-sync.svelte.ts';
import { fieldOfSubject } from './field-paths.ts';
import { FormState } from './form-state.svelte.ts';
import { LiveCheck } from './live-check.svelte.ts';

/** Whether the figures on the screen are the server's, a preview, or older than the last change. */
export type Standing = 'confirmed' | 'preview' | 'stale' | 'none';

export class Composer {
  readonly form: FormState;
  readonly live = new LiveCheck();
  sync = $state.raw<DraftSync | null>(null);
  /** Result that the server gave for `confirmedText`. */
  confirmed = $state.raw<CheckResult | null>(null);
  confirmedText = $state.raw('');
  machineId = $state<string | null>(null);
  machineVersion = $state<number | null>(null);

  constructor(values: Record<string, string>, unitSet: UnitSet) {
    this.form = new FormState(values, unitSet);
    this.form.more = () => ({ errors: this.errors, missing: this.missing });
  }

  readonly technical = $derived.by(() => readRequirement(this.form.values, this.form.unitSet));
  readonly terms = $derived.by(() => readCommercial(this.form.values, this.form.unitSet));
  readonly errors = $derived({ ...this.technical.errors, ...this.terms.errors });
  readonly missing = $derived([...this.technical.missing, ...this.terms.missing]);
  readonly requirementText = $derived(
    this.technical.requirement ? JSON.stringify(this.technical.requirement) : '',
  );
  readonly drawing = $derived.by(() =>
    coilDrawing(drawingInput(this.form.readableValues(), this.form.unitSet), { units: this.form.unitSet }),
  );

  readonly shown: { result: CheckResult | null; standing: Standing } = $derived.by(() => {
    const text = this.requirementText;
    if (text !== '' && this.confirmed && this.confirmedText === text) {
      return { result: this.confirmed, standing: 'confirmed' };
    }
    if (text !== '' && this.live.result && this.live.resultText === text) {
      return { result: this.live.result, standing: 'preview' };
    }
    const last = this.live.result ?? this.confirmed;
    return { result: last, standing: last ? 'stale' : 'none' };
  });

  readonly answers: readonly FindingAnswer[] = $derived(
    this.shown.standing === 'confirmed' ? (this.sync?.check?.answers ?? []) : [],
  );
  readonly open = $derived(openFindings(this.shown.result?.findings ?? [], this.answers));

  /** Asks the live check about what is typed now; call from an effect. */
  askLive(): void {
    const { requirement } = this.technical;
    if (
      requirement &&
      this.requirementText !== this.live.resultText &&
      this.requirementText !== this.confirmedText
    ) {
      this.live.ask(requirement, this.requirementText);
    }
  }

  /** The server's result for what is on the screen now. */
  confirm(result: CheckResult, text = this.requirementText): void {
    this.confirmed = result;
    this.confirmedText = text;
  }

  subjectOf(finding: Finding): { label: string; href: string } | undefined {
    const field = fieldOfSubject(finding.subject, this.form.fields());
    return field
      ? { label: field.label, href: `#${fieldId(field.path)}` }
      : { label: sectionText[sectionOf(finding.subject)], href: `#section-${sectionOf(finding.subject)}` };
  }

  /** How far each section is, for the contents list. */
  contents(options: { sections?: readonly SectionId[]; files?: number } = {}): ContentsItem[] {
    const unreadableOf = (id: SectionId) =>
      Object.keys(this.errors).filter((path) => sectionOf(path) === id).length;
    return (options.sections ?? sectionIds).map((id) => {
      const item = { label: sectionText[id], href: `#section-${id}` };
      const unreadable = unreadableOf(id);
      const gaps = this.missing.filter((path) => sectionOf(path) === id).length;
      const blockers = this.open.blockers.filter((finding) => sectionOf(finding.subject) === id).length;
      if (unreadable > 0) return { ...item, state: 'attention' as const, note: 'cannot be read' };
      if (gaps > 0) return { ...item, state: 'open' as const, note: `${gaps} to fill in` };
      if (blockers > 0 && this.shown.standing !== 'stale') {
        return {
          ...item,
          state: 'blocked' as const,
          note: blockers === 1 ? 'a blocker' : `${blockers} blockers`,
        };
      }
      if (id === 'files') {
        const files = options.files ?? 0;
        return files === 0
          ? { ...item, state: 'optional' as const }
          : { ...item, state: 'complete' as const, note: files === 1 ? '1 file' : `${files} files` };
      }
      if (id === 'fixture' && (this.form.values['fixture.kind'] ?? 'none') === 'none') {
        return { ...item, state: 'optional' as const, note: 'none asked for' };
      }
      return { ...item, state: 'complete' as const };
    });
  }

  /** Everything that keeps the draft from being posted, as links to the fields. */
  obstacles(): SummaryLine[] {
    this.form.showAll = true;
    const lines: SummaryLine[] = [];
    for (const field of this.form.fields()) {
      const message = this.form.errorOf(field.path);
      const href = `#${fieldId(field.path)}`;
      if (!message || lines.some((line) => line.href === href)) continue;
      lines.push({ message: message.startsWith('Enter') ? message : `${field.label}: ${message}`, href });
    }
    // What no field of the form carries would otherwise block without a word.
    for (const [path, message] of Object.entries(this.errors)) {
      if (!this.form.field(path)) lines.push({ message, href: `#section-${sectionOf(path)}` });
    }
    if (lines.length > 0) return lines;
    return [...this.open.blockers, ...this.open.cautions].map((finding) => ({
      message: `${finding.severity === 'blocker' ? 'Blocker' : 'Caution to acknowledge'}: ${renderFinding(finding, this.form.unitSet)}`,
      href: '#findings',
    }));
  }

  /** Takes over the values of a machine. */
  useMachine(machine: { id: string; version: number; body: Machine }): void {
    this.form.clear('machine');
    this.form.setMany(machineValues(machine.body, this.form.unitSet));
    this.machineId = machine.id;
    this.machineVersion = machine.version;
  }

  /** Fits the setting of a ladder row. */
  fitRow(row: LadderRow): void {
    const machine = this.technical.requirement?.machine;
    if (!machine) return;
    const texts: Record<string, string> = {};
    if (machine.bank.kind === 'groups') {
      row.unitsPerGroup.forEach((units, index) => {
        texts[`machine.bank.groups.${index}.fitted`] = String(units);
      });
    } else {
      machine.bank.totals.forEach((total, index) => {
        const isRow = Math.abs(total.capacitance - row.capacitance) <= 1e-9 * row.capacitance;
        texts[`machine.bank.totals.${index}.fitted`] = isRow ? 'yes' : '';
      });
    }
    const ratio = row.tap === null ? undefined : machine.transformer?.ratios[row.tap];
    if (ratio !== undefined) texts['machine.transformer.fitted'] = String(ratio);
    this.form.setMany(texts);
  }

  /** Takes over proposed acceptance lines; computed ones of the same kind are renewed, own lines stay. */
  takeLines(lines: readonly AcceptanceLine[]): void {
    const { form } = this;
    let rows = lineCount(form.values);
    for (const line of lines) {
      let index = Array.from({ length: rows }, (_, at) => at).find(
        (at) => form.values[`acceptance.${at}.id`] === line.id,
      );
      if (index !== undefined && form.values[`acceptance.${index}.basis`] !== 'computed') continue;
      if (index === undefined) {
        if (rows >= mostLines) break;
        index = rows;
        rows += 1;
      }
      this.#putLine(line, index);
    }
    form.setMany({ 'acceptance.rows': String(rows) });
  }

  addLine(kind: AcceptanceKind): void {
    const rows = lineCount(this.form.values);
    if (rows >= mostLines) return;
    this.#putLine(newLine(kind, `${kind}-${rows + 1}-${Math.random().toString(36).slice(2, 7)}`), rows);
    this.form.setMany({ 'acceptance.rows': String(rows + 1) });
  }

  removeLine(index: number): void {
    const rows = lineCount(this.form.values);
    const kept: Record<string, string> = { 'acceptance.rows': String(rows - 1) };
    for (const [path, text] of Object.entries(this.form.values)) {
      const match = /^acceptance\.(\d+)\.(.+)$/.exec(path);
      const at = Number(match?.[1]);
      if (match && at !== index) kept[`acceptance.${at > index ? at - 1 : at}.${match[2]}`] = text;
    }
    this.form.clear('acceptance');
    this.form.setMany(kept);
  }

  #putLine(line: AcceptanceLine, index: number): void {
    this.form.clear(`acceptance.${index}`);
    const texts = acceptanceValues([line], this.form.unitSet);
    const moved: Record<string, string> = {};
    for (const [path, text] of Object.entries(texts)) {
      if (path.startsWith('acceptance.0.'))
        moved[path.replace('acceptance.0.', `acceptance.${index}.`)] = text;
    }
    this.form.setMany(moved);
  }

  close(): void {
    this.live.close();
    this.sync?.close();
  }
}
