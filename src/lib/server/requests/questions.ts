import { asc, eq } from 'drizzle-orm';
import type { Reader } from '../db/index.ts';
import { AppError } from '../../domain/errors.ts';
import { company } from '../db/schema/companies.ts';
import { question } from '../db/schema/requests.ts';

export type QuestionRow = typeof question.$inferSelect;

export async function questionById(reader: Reader, id: string): Promise<QuestionRow> {
  const [row] = await reader.select().from(question).where(eq(question.id, id));
  if (!row) throw new AppError('not-found');
  return row;
}

/** All questions of a request with the asker's company, for the buyer. */
export async function unsafeQuestions(reader: Reader, requestId: string) {
  return reader
    .select({
      id: question.id,
      companyId: question.companyId,
      companyName: company.name,
      kind: question.kind,
      text: question.text,
      askedAt: question.askedAt,
      answer: question.answer,
      answeredAt: question.answeredAt,
      version: question.version,
    })
    .from(question)
    .innerJoin(company, eq(company.id, question.companyId))
    .where(eq(question.requestId, requestId))
    .orderBy(asc(question.askedAt), asc(question.id));
}
