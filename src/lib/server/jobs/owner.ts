import { randomUUID } from 'node:crypto';
import { hostname } from 'node:os';

/** Names this process among all that take jobs: machine, process id, and a part that no later process shares. */
export const newOwner = (): string => `${hostname().slice(0, 30)}:${process.pid}:${randomUUID().slice(0, 12)}`;

function processLives(pid: number): boolean {
  try {
    process.kill(pid, 0);
    return true;
  } catch (error) {
    return (error as NodeJS.ErrnoException).code === 'EPERM';
  }
}

/**
 * Whether another process of this machine is certainly gone, so that its jobs need not wait until they count as silent.
 * A process of another machine is never known to be gone.
 * @param living the owners of this very process
 */
export function ownerIsDead(owner: string, living: ReadonlySet<string>): boolean {
  if (living.has(owner)) return false;
  const [host, pid] = owner.split(':');
  if (host !== hostname().slice(0, 30) || !/^\d+$/.test(pid ?? '')) return false;
  return Number(pid) === process.pid || !processLives(Number(pid));
}
