import { publicCommercial, type Commercial, type PublicCommercial } from '../../domain/commercial.ts';
import type { FindingAnswer } from '../../domain/finding-answers.ts';
import type { CheckResult, Requirement } from '../../induction/check/types.ts';

export interface SpecificationFile {
  id: string;
  kind: 'request-sketch' | 'part-drawing';
  name: string;
  sha256: string;
}

/** What is frozen when a request is posted; bids and orders refer to exactly this. */
export interface SpecificationBody {
  format: 'coilyard-specification-1';
  requestNumber: number;
  title: string;
  specificationNumber: number;
  requirement: Requirement;
  check: CheckResult;
  /** Cautions acknowledged and blockers carried, by name. */
  answers: FindingAnswer[];
  /** Without what belongs to the buyer alone. */
  commercial: PublicCommercial;
  files: SpecificationFile[];
  /** ms UTC, business time. */
  frozenAt: number;
}

/** The exact text whose SHA-256 is the specification's hash. */
export function specificationText(
  parts: Omit<SpecificationBody, 'format' | 'commercial'> & { commercial: Commercial },
): string {
  const body: SpecificationBody = {
    format: 'coilyard-specification-1',
    requestNumber: parts.requestNumber,
    title: parts.title,
    specificationNumber: parts.specificationNumber,
    requirement: parts.requirement,
    check: parts.check,
    answers: parts.answers,
    commercial: publicCommercial(parts.commercial),
    files: parts.files,
    frozenAt: parts.frozenAt,
  };
  return JSON.stringify(body);
}

/** Reads a body that this module wrote. */
export function readSpecification(text: string): SpecificationBody {
  return JSON.parse(text) as SpecificationBody;
}
