import { z } from 'zod';

/** Bytes of one piece of a transfer; below the server's limit for a request body. */
export const UPLOAD_CHUNK = 8 * 2 ** 20;

const ENDING = /\.mzML(\.gz)?$/i;
/** Control and formatting characters, which would make one name look like another. */
const INVISIBLE = /[\p{Cc}\p{Cf}\p{Co}\p{Cs}\p{Zl}\p{Zp}]/gu;

/** A file's bare name: without folders of either kind of slash, and without invisible characters. */
export const bareFileName = (name: string): string =>
  (name.replace(INVISIBLE, '').split(/[/\\]/).at(-1) ?? '').replace(/\s+/g, ' ').trim();

/** A name that is kept and shown. It never becomes part of a path. */
export const fileNameSchema = z
  .string()
  .max(4000)
  .transform(bareFileName)
  .refine((name) => ENDING.test(name), {
    message: 'The name must end in .mzML or .mzML.gz.'
  })
  .refine((name) => !/^\.?mzML(\.gz)?$/i.test(name), { message: 'The file needs a name before its ending.' })
  .refine((name) => name.length <= 200, { message: 'The name is longer than 200 characters.' });

/** What a client says before the first byte of a transfer. */
export const newUploadSchema = z.object({
  filename: fileNameSchema,
  studyId: z.uuid('The study is missing.'),
  bytes: z.number().int().nonnegative()
});

/** Why a file cannot be sent, or null; the client asks before it sends anything. */
export function uploadProblem(file: { name: string; size: number }, maxBytes: number): string | null {
  const name = fileNameSchema.safeParse(file.name);
  if (!name.success) return `${name.error.issues[0].message} Convert the original data to mzML 1.1 first.`;
  if (file.size === 0) return 'The file is empty. Export or copy it again.';
  if (file.size > maxBytes) return tooLarge(file.size, maxBytes);
  return null;
}

/** Bytes in decimal units, e.g. "12.4 MB". */
export const sizeText = (bytes: number): string =>
  bytes >= 1e9 ? `${(bytes / 1e9).toFixed(2)} GB` : bytes >= 1e5 ? `${(bytes / 1e6).toFixed(1)} MB` : `${bytes} bytes`;

/** Plain words for a file beyond the limit, with the cure. */
export const tooLarge = (bytes: number, maxBytes: number): string =>
  `The file has ${sizeText(bytes)}; at most ${sizeText(maxBytes)} are taken. Compress it with gzip (.mzML.gz), or export fewer scans.`;
