import type { PaymentServiceError, Payments } from '../adapters/payments.ts';
import type { Tx } from '../db/index.ts';
import type { OperationRow } from './operations.ts';

export interface Applied {
  objectId: string;
  result: Record<string, unknown>;
}

/** How one kind of outside call is made, found again, and booked. */
export interface OperationHandler<Answer> {
  call(payments: Payments, op: OperationRow): Promise<Answer>;
  /** Looks for the effect at the service, by metadata; undefined when it did not happen. */
  find(payments: Payments, op: OperationRow): Promise<Answer | undefined>;
  /** Writes what follows from the answer; in one transaction with the operation becoming known. */
  apply(tx: Tx, op: OperationRow, answer: Answer): Promise<Applied>;
  /** The service refused for certain: nothing happened there. */
  refused(tx: Tx, op: OperationRow, error: PaymentServiceError): Promise<void>;
}

/** The answer of the service is not what we asked for: nothing is booked, a person has to look. */
export class AnswerDiffers extends Error {
  constructor(message: string) {
    super(message);
    this.name = 'AnswerDiffers';
  }
}
