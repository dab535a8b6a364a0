import { z } from 'zod';

export const orderMessageInput = z
  .object({
    commandId: z.uuid(),
    text: z.string().trim().max(5000, 'Keep a message below 5000 characters.').default(''),
    files: z.array(z.uuid()).max(10, 'At most 10 files go with a message.').default([]),
  })
  .refine((message) => message.text !== '' || message.files.length > 0, {
    path: ['text'],
    message: 'Write a message or attach a file.',
  });
