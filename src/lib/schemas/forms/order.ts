import { z } from 'zod';
import { disputeReasons } from '../../domain/dispute-states.ts';
import { parseAmount } from '../../domain/money.ts';

/** Forms of the order room: text as typed → what the use-cases take. */
const id = z.uuid('The form is incomplete; please reload the page.');
const version = z.coerce.number().int().positive().optional();
const commandId = z.uuid('The form is incomplete; please reload the page.');
const longText = (max = 4000) =>
  z
    .string()
    .default('')
    .transform((text) => text.trim())
    .pipe(z.string().max(max, `At most ${max} characters.`));
const needed = (message: string, max = 200) =>
  z
    .string({ error: message })
    .transform((text) => text.trim())
    .pipe(z.string().min(1, message).max(max, `At most ${max} characters.`));
const date = (message: string) => z.iso.date({ error: message });
const optionalFile = z
  .string()
  .optional()
  .transform((text) => (text ? text : null))
  .pipe(z.uuid('Please upload the file again.').nullable());

/** "1,234.50" → minor units; nothing is guessed. */
export const amountField = (message = 'Enter an amount such as 1,234.50.') =>
  z.string({ error: message }).transform((text, context) => {
    const minor = text.trim() === '' ? undefined : parseAmount(text);
    if (minor === undefined) {
      context.addIssue({ code: 'custom', message });
      return z.NEVER;
    }
    return minor;
  });

export const milestoneForm = z.object({ milestoneId: id, version });
export const declineForm = z.object({ reason: longText(1000) });
export const drawingForm = z.object({
  fileId: z.uuid('Upload the drawing first.'),
  note: longText(1000),
  commandId,
});
export const judgeDrawingForm = z.object({
  revisionId: id,
  decision: z.enum(['approve', 'request-changes']),
  reasons: longText(),
  version,
});
export const submitForm = z.object({ milestoneId: id, note: longText(2000), version });
export const returnForm = z.object({ milestoneId: id, reasons: longText(), version });
export const concedeForm = z.object({ recordId: id, reasons: longText(2000) });
export const remakeForm = z.object({
  recordId: id,
  reasons: longText(2000),
  dueDate: date('Enter the new date.'),
});
export const shipForm = z.object({
  carrier: needed('Enter the carrier.'),
  trackingNumber: needed('Enter the consignment number.'),
  shippedOn: date('Enter the day it was handed over.'),
  note: longText(1000),
  paperFileId: optionalFile,
  commandId,
});
export const proofForm = z.object({
  shipmentId: id,
  deliveredOn: date('Enter the day of delivery.'),
  proofFileId: optionalFile,
});
export const receiptForm = z.object({ shipmentId: id, note: longText(1000) });
export const groundForm = z.object({
  ground: z.enum(['not-acknowledged', 'not-funded', 'drawing-unanswered', 'overdue']),
});
export const answerEndForm = z.object({ proposalId: id, answer: z.enum(['accept', 'decline', 'withdraw']) });
export const endForm = z.object({ workInHand: longText(1000), reason: longText(2000), commandId });

export const openDisputeForm = z.object({
  reason: z.enum(disputeReasons, { error: 'Choose a reason.' }),
  complaintAbout: needed('Name the acceptance line or the piece.', 200),
  pieceId: optionalFile,
  amountClaimed: amountField(),
  text: needed('Say what is wrong, with figures and dates.', 6000),
  commandId,
});
export const statementForm = z.object({ text: needed('Write your statement.', 6000), commandId });
export const offerForm = z.object({
  release: amountField(),
  refund: amountField(),
  note: longText(1000),
  commandId,
});
export const answerOfferForm = z.object({ offerId: id, answer: z.enum(['accept', 'decline']) });
export const decisionForm = z.object({
  release: amountField(),
  refund: amountField(),
  goods: longText(1000),
  otherMilestones: longText(1000),
  freightPaidBy: z.enum(['buyer', 'fabricator', 'none'], { error: 'Choose who pays freight.' }),
  reason: longText(6000),
  version,
});

/** File ids of one hidden input name, as `form.getAll(name)` gives them. */
export const fileIdsForm = z
  .array(z.union([z.literal(''), z.uuid('Please upload the file again.')]))
  .max(20, 'At most 20 files at once.')
  .transform((ids) => ids.filter((fileId) => fileId !== ''));
