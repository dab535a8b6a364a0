/** What a form of typed fields knows: texts, what they were read as, and which errors are due to be seen. */
import type { Fix, Requirement } from '$lib/induction/check/types.ts';
import type { UnitSet } from '$lib/induction/units/dimensions.ts';
import type { FieldSpec } from '$lib/schemas/forms/field-spec.ts';
import { fieldText, readField, readingOf } from '$lib/schemas/forms/read-field.ts';
import { sectionGroups, sectionIds, titleField } from '$lib/schemas/forms/requirement-sections.ts';
import { valuesInSet } from '$lib/schemas/forms/unit-set.ts';
import { formPath } from './field-paths.ts';

export interface TypedForm {
  values: Record<string, string>;
  readonly unitSet: UnitSet;
  set(path: string, text: string): void;
  /** The person has left the field: an unreadable text may be told now. */
  leave(path: string): void;
  errorOf(path: string): string | undefined;
  readingOf(field: FieldSpec): string | undefined;
}

interface More {
  errors: Record<string, string>;
  missing: readonly string[];
}

export class FormState implements TypedForm {
  values = $state<Record<string, string>>({});
  unitSet = $state<UnitSet>('metric');
  /** Errors and gaps are shown everywhere, after someone tried to go on. */
  showAll = $state(false);
  /** Counts every change, so that saving and checking know when there is something new. */
  changes = $state(0);
  /** Messages of the server by path; gone when the field is changed. */
  serverErrors = $state<Record<string, string>>({});
  /** What reading the whole form adds: values out of range, answers that another answer asks for. */
  more: () => More = () => ({ errors: {}, missing: [] });
  #left = $state<Record<string, boolean>>({});
  /** The last text of each field that could be read. */
  #readable: Record<string, string> = {};

  constructor(values: Record<string, string>, unitSet: UnitSet) {
    this.values = { ...values };
    this.unitSet = unitSet;
    // What was already there when the page came is told at once where it cannot be read.
    this.#left = Object.fromEntries(Object.keys(values).map((path) => [path, true]));
  }

  set(path: string, text: string): void {
    if ((this.values[path] ?? '') === text) return;
    this.values[path] = text;
    this.#left[path] = false;
    delete this.serverErrors[path];
    this.changes += 1;
  }

  setMany(texts: Record<string, string>): void {
    for (const [path, text] of Object.entries(texts)) this.values[path] = text;
    this.changes += 1;
  }

  /** Takes away every field below a path, e.g. the rows of a list. */
  clear(prefix: string): void {
    for (const path of Object.keys(this.values)) {
      if (path === prefix || path.startsWith(`${prefix}.`)) delete this.values[path];
    }
    this.changes += 1;
  }

  replaceAll(values: Record<string, string>, unitSet: UnitSet): void {
    this.values = { ...values };
    this.unitSet = unitSet;
    this.changes += 1;
  }

  leave(path: string): void {
    this.#left[path] = true;
  }

  /** Every field of the form that counts now. */
  readonly #fields: FieldSpec[] = $derived.by(() => {
    const shown = sectionIds.flatMap((section) =>
      sectionGroups(section, this.values)
        .flatMap((group) => group.fields)
        .filter((field) => !field.when || field.when(this.values)),
    );
    return [titleField, ...shown];
  });

  fields(): FieldSpec[] {
    return this.#fields;
  }

  field(path: string): FieldSpec | undefined {
    return this.#fields.find((field) => field.path === path);
  }

  wasLeft(path: string): boolean {
    return this.showAll || this.#left[path] === true;
  }

  readonly #errors: Record<string, string> = $derived.by(() => {
    const errors: Record<string, string> = {};
    for (const field of this.#fields) {
      const typed = (this.values[field.path] ?? '').trim();
      if (typed === '') {
        if (field.empty === 'required') errors[field.path] = `Enter “${field.label}”.`;
        continue;
      }
      const read = readField(field, typed, this.unitSet);
      if (!read.ok) errors[field.path] = read.message;
    }
    return errors;
  });

  errorOf(path: string): string | undefined {
    const told = this.serverErrors[path];
    if (told) return told;
    const more = this.more();
    const message = this.#errors[path] ?? more.errors[path];
    const empty = (this.values[path] ?? '').trim() === '';
    if (message) return (empty ? this.showAll : this.wasLeft(path)) ? message : undefined;
    if (!this.showAll || !more.missing.includes(path)) return undefined;
    return `Enter “${this.field(path)?.label ?? path}”.`;
  }

  readingOf(field: FieldSpec): string | undefined {
    if (field.kind !== 'quantity') return undefined;
    return readingOf(this.values[field.path] ?? '', field.dimension, this.unitSet) || undefined;
  }

  /** The texts with half-typed ones replaced by what they were last, for the drawing. */
  readableValues(): Record<string, string> {
    const values: Record<string, string> = { ...this.values };
    for (const field of this.#fields) {
      const typed = (this.values[field.path] ?? '').trim();
      if (typed === '' ? field.empty !== 'required' : !this.#errors[field.path]) {
        this.#readable[field.path] = typed;
      } else if (this.#readable[field.path] !== undefined) {
        values[field.path] = this.#readable[field.path] ?? '';
      }
    }
    return values;
  }

  /** Changes the unit set; what is meant stays the same. */
  changeUnits(to: UnitSet): void {
    if (to === this.unitSet) return;
    this.values = valuesInSet(this.values, this.unitSet, to);
    this.unitSet = to;
    this.#readable = {};
    this.changes += 1;
  }

  /** Puts the value of a finding's fix into its field; the field's path, or undefined where there is none. */
  applyFix(fix: Fix, requirement: Requirement | null): string | undefined {
    const path = formPath(fix.field);
    if (fix.field === 'machine.transformer.fittedTap') {
      const ratio = requirement?.machine.transformer?.ratios[Number(fix.value)];
      if (ratio === undefined) return undefined;
      this.set(path, String(ratio));
      return path;
    }
    const field = this.field(path);
    if (!field) return undefined;
    this.set(path, fieldText(field, fix.value, this.unitSet));
    this.leave(path);
    return path;
  }
}
