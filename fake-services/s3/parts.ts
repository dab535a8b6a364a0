/**
 * What S3 checks when the parts of an upload are put together, and s3rver does not: each named part was sent, and
 * its ETag is the one the store gave out (for a part: the MD5 of its bytes). s3rver keeps parts as files by number.
 */
import { createHash } from 'node:crypto';
import { createReadStream, existsSync } from 'node:fs';
import path from 'node:path';
import { S3Refusal, type SignedRequest } from './signature.ts';

async function md5(file: string): Promise<string> {
  const hash = createHash('md5');
  for await (const chunk of createReadStream(file)) hash.update(chunk as Buffer);
  return hash.digest('hex');
}

/** Throws the documented refusals (`NoSuchUpload`, `InvalidPart`) for a request that completes an upload. */
export async function checkCompletedParts(
  request: SignedRequest,
  body: Buffer | undefined,
  dataDir: string,
): Promise<void> {
  const uploadId = new Map(request.query).get('uploadId');
  if (request.method !== 'POST' || uploadId === undefined || body === undefined) return;
  const bucket = request.path.split('/')[1] ?? '';
  const dir = path.join(dataDir, bucket, '._S3rver_uploads', path.basename(uploadId));
  if (!existsSync(dir)) {
    throw new S3Refusal(404, 'NoSuchUpload', 'The specified upload does not exist.');
  }
  for (const [, part = ''] of body.toString('utf8').matchAll(/<Part>([\s\S]*?)<\/Part>/g)) {
    const number = /<PartNumber>(\d+)<\/PartNumber>/.exec(part)?.[1] ?? '';
    const etag = /<ETag>(?:&quot;|")?([0-9a-f]{32})(?:&quot;|")?<\/ETag>/i.exec(part)?.[1]?.toLowerCase();
    const file = path.join(dir, number);
    if (number === '' || !existsSync(file) || (await md5(file)) !== etag) {
      throw new S3Refusal(400, 'InvalidPart', 'One or more of the specified parts could not be found.');
    }
  }
}
