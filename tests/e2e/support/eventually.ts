import { setTimeout as sleep } from 'node:timers/promises';

/**
 * Asks again and again until there is an answer other than null.
 * @param what is waited for, for the message
 * @throws Error after the patience (ms)
 */
export async function eventually<T>(what: string, ask: () => Promise<T | null>, patience = 30_000): Promise<T> {
  for (const end = performance.now() + patience; performance.now() < end; await sleep(50)) {
    const answer = await ask();
    if (answer !== null) return answer;
  }
  throw new Error(`Waited ${patience / 1000} s in vain for: ${what}.`);
}
