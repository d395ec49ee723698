import { fileURLToPath } from 'node:url';

/** Folder of the project, without a closing slash. */
export const root = fileURLToPath(new URL('../..', import.meta.url)).replace(/\/$/, '');
