import type { Finding } from '../induction/check/types.ts';

/** A caution seen or a blocker carried, by name, for one finding of one check. */
export interface FindingAnswer {
  code: string;
  subject: string;
  kind: 'acknowledged' | 'carried';
  name: string;
  reason: string;
  at: number;
}

interface Named {
  code: string;
  subject: string;
}

export function answerTo(finding: Named, answers: readonly FindingAnswer[]): FindingAnswer | undefined {
  return answers.find((answer) => answer.code === finding.code && answer.subject === finding.subject);
}

/** Only a blocker that is no safety matter may be carried by the buyer. */
export function mayCarry(finding: Pick<Finding, 'severity' | 'safety'>): boolean {
  return finding.severity === 'blocker' && !finding.safety;
}

/** What still stands in the way of posting. */
export function openFindings(
  findings: readonly Finding[],
  answers: readonly FindingAnswer[],
): { blockers: Finding[]; cautions: Finding[] } {
  return {
    blockers: findings.filter(
      (finding) =>
        finding.severity === 'blocker' &&
        !(mayCarry(finding) && answerTo(finding, answers)?.kind === 'carried'),
    ),
    cautions: findings.filter(
      (finding) => finding.severity === 'caution' && answerTo(finding, answers) === undefined,
    ),
  };
}
