import { describe, expect, it } from 'vitest';
import { undoTarget } from './claim-state';

type Action = 'proposed' | 'confirmed' | 'rejected' | 'opened' | 'undone';
const past = (...newestFirst: Action[]) => newestFirst.map((action, id) => ({ id, action }));

describe('undoTarget', () => {
  it('has nothing to take back on an untouched ion', () => {
    expect(undoTarget([])).toBeNull();
  });

  it('takes back the newest decision and names the one below it', () => {
    const found = undoTarget(past('rejected', 'confirmed', 'proposed'));
    expect(found).toEqual({ target: { id: 0, action: 'rejected' }, prior: { id: 1, action: 'confirmed' } });
  });

  it('goes one further back after an undo', () => {
    expect(undoTarget(past('undone', 'rejected', 'confirmed'))?.target.id).toBe(2);
  });

  it('stops when every decision has been taken back', () => {
    expect(undoTarget(past('undone', 'undone', 'rejected', 'confirmed'))).toBeNull();
  });

  it('never takes back what the program proposed', () => {
    expect(undoTarget(past('proposed', 'undone', 'confirmed'))).toBeNull();
  });
});
