import { pino } from 'pino';

/** Structured log on standard output. File contents and secrets never go in. */
export const log = pino({ level: process.env.LOG_LEVEL ?? 'info', base: { app: 'rivenmark' } });
