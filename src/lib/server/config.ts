import { z } from 'zod';

const schema = z.object({
  DATABASE_URL: z.string().startsWith('mysql://'),
  /** folder of run files and of transfers under way */
  RIVENMARK_FILES: z.string().min(1),
  ORIGIN: z.url().default('http://127.0.0.1:4173'),
  SMTP_URL: z.string().optional(),
  MAIL_FROM: z.string().default('Rivenmark <no-reply@rivenmark.invalid>'),
  /** folder in which the local mail catcher keeps messages; turns the development mail page on */
  RIVENMARK_MAIL_FOLDER: z.string().optional(),
  RIVENMARK_WORKERS: z.coerce.number().int().min(0).max(32).default(2),
  /** bytes */
  RIVENMARK_MAX_UPLOAD: z.coerce
    .number()
    .int()
    .positive()
    .default(2 * 1024 ** 3),
  /** milliseconds between heartbeats of a running job; a job silent for five of them counts as dead */
  RIVENMARK_HEARTBEAT: z.coerce.number().int().min(50).default(2000),
  S3_ENDPOINT: z.string().optional(),
  S3_BUCKET: z.string().optional(),
  S3_REGION: z.string().default('us-east-1'),
  S3_KEY_ID: z.string().optional(),
  S3_SECRET: z.string().optional(),
  LOG_LEVEL: z.enum(['fatal', 'error', 'warn', 'info', 'debug', 'silent']).default('info')
});
export type Config = z.infer<typeof schema>;

let cached: Config | null = null;

/**
 * Settings of the server process, read once from the environment (README lists them).
 * @throws Error naming every missing or wrong variable
 */
export function config(): Config {
  if (cached) return cached;
  const parsed = schema.safeParse(process.env);
  if (!parsed.success) {
    const wrong = parsed.error.issues.map((issue) => `${issue.path.join('.')}: ${issue.message}`).join('; ');
    throw new Error(
      `The environment of the server is not usable: ${wrong}. Start it with \`npm start\`, or set these.`
    );
  }
  return (cached = parsed.data);
}
