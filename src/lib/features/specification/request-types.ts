/** What the request page is handed for the buyer; the shape of the server's view, without its code. */
import type { Commercial } from '$lib/domain/commercial.ts';
import type { FindingAnswer } from '$lib/domain/finding-answers.ts';
import type { RequestState } from '$lib/domain/request-states.ts';
import type { CheckResult, Requirement } from '$lib/induction/check/types.ts';

export interface BuyerQuestion {
  id: string;
  companyName: string;
  kind: 'clarification' | 'proposal';
  text: string;
  askedAt: number;
  answer: string | null;
  answeredAt: number | null;
  version: number;
}

export interface BuyerRequest {
  id: string;
  number: number;
  title: string;
  state: RequestState;
  version: number;
  closesAt: number | null;
  postedAt: number | null;
  buyerZone: string;
  withdrawReason: string;
  specification: { number: number; hash: string; createdAt: number } | null;
  commercial: Commercial | null;
  requirement: Requirement | null;
  check: CheckResult | null;
  answers: FindingAnswer[];
  files: { id: string; kind: string; name: string; size: number }[];
  questions: BuyerQuestion[];
  bidsHandedIn: number;
  orderId: string | null;
  history: { id: string; at: number; action: string; who: string }[];
  may: { edit: boolean; withdraw: boolean; answer: boolean; compare: boolean };
}
