import { createCipheriv, createDecipheriv, randomBytes } from 'node:crypto';
import { z } from 'zod';

/** What a mail says; the look is added when it is sent. Paths are own paths, never whole links. */
export const mailContent = z.object({
  heading: z.string().min(1),
  paragraphs: z.array(z.string()),
  facts: z.array(z.tuple([z.string(), z.string()])).default([]),
  action: z
    .object({ label: z.string(), path: z.string().startsWith('/') })
    .nullable()
    .default(null),
});
export type MailContent = z.input<typeof mailContent>;

/** AES-256-GCM over the content of a mail that carries a single-use token. */
export function sealContent(content: MailContent, key: Buffer): string {
  const iv = randomBytes(12);
  const cipher = createCipheriv('aes-256-gcm', key, iv);
  const sealed = Buffer.concat([cipher.update(JSON.stringify(content), 'utf8'), cipher.final()]);
  return Buffer.concat([iv, cipher.getAuthTag(), sealed]).toString('base64');
}

export function openContent(sealed: string, key: Buffer): z.output<typeof mailContent> {
  const bytes = Buffer.from(sealed, 'base64');
  const decipher = createDecipheriv('aes-256-gcm', key, bytes.subarray(0, 12));
  decipher.setAuthTag(bytes.subarray(12, 28));
  const text = Buffer.concat([decipher.update(bytes.subarray(28)), decipher.final()]).toString('utf8');
  return mailContent.parse(JSON.parse(text));
}
