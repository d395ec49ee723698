import { describe, expect, it } from 'vitest';
import { ServiceError } from '../errors';
import { claimForFormula, lossBetween, type ClaimContext } from './claim-formula';

// Masses: AME2020 (Chinese Physics C 45, 030003, 2021), electron mass CODATA 2018; caffeine C8H10N4O2 protonated is
// m/z 195.08765, and C6H8N3O+ (loss of methyl isocyanate, C2H3NO) 138.06619.
const context: ClaimContext = {
  mz: 138.0662,
  charge: 1,
  tolerance: { ppm: 10, mda: 1 },
  treeIon: 'C8H11N4O2',
  isolated: { mz: 195.0877, formula: 'C8H11N4O2' },
  from: null,
  alternatives: [],
  reason: null
};
const messageOf = (work: () => unknown): string => {
  try {
    work();
  } catch (e) {
    if (e instanceof ServiceError) return `${e.code}: ${e.message}`;
    throw e;
  }
  return 'accepted';
};

describe('claimForFormula', () => {
  it('computes error, DBE, parity and the measured loss from the isolated ion', () => {
    const claim = claimForFormula(context, 'C6H8N3O');
    expect(claim).toMatchObject({ formula: 'C6H8N3O', dbe: 4.5, oddElectron: false, loss: 'C2H3NO', link: 'measured' });
    expect(claim.errorPpm).toBeCloseTo(0.1, 0);
    expect(claim.lossRadical).toBe(false);
  });

  it('writes a formula in Hill order whatever way it was typed', () => {
    expect(claimForFormula(context, 'N3C6OH8').formula).toBe('C6H8N3O');
  });

  it('keeps the ion on what it hung on before and calls that link inferred', () => {
    const between = claimForFormula({ ...context, from: { mz: 177.077, formula: 'C8H9N4O' } }, 'C6H8N3O');
    expect(between).toMatchObject({ fromFormula: 'C8H9N4O', loss: 'C2HN', link: 'inferred' });
  });

  it('refuses a formula far from the found m/z', () => {
    expect(messageOf(() => claimForFormula(context, 'C6H9N3O'))).toMatch(/^invalid: .*ppm apart/);
  });

  it('refuses atoms that the precursor ion does not have', () => {
    // C3H12N3OS+ is m/z 138.0696, 3.4 mDa away: inside five windows of 20 mDa.
    const wide = { ...context, tolerance: { ppm: 10, mda: 20 } };
    expect(messageOf(() => claimForFormula(wide, 'C3H12N3OS'))).toMatch(/precursor ion C8H11N4O2 does not have/);
  });

  it('takes atoms beyond the isolated ion only with a reason', () => {
    const isolated = { mz: 120.0556, formula: 'C6H6N3' };
    expect(messageOf(() => claimForFormula({ ...context, isolated }, 'C6H8N3O'))).toMatch(/isolated for this spectrum/);
    const claim = claimForFormula({ ...context, isolated, reason: 'water taken up in the trap' }, 'C6H8N3O');
    expect(claim).toMatchObject({ loss: null, link: null, fromFormula: null });
  });

  it('says where a formula cannot be read', () => {
    expect(messageOf(() => claimForFormula(context, 'C6Xy8'))).toMatch(/invalid: .*character 3/);
  });
});

describe('lossBetween', () => {
  it('marks radical losses and refuses what is no part', () => {
    expect(lossBetween('C8H10O', 'C7H7O')).toEqual({ loss: 'CH3', lossRadical: true });
    expect(lossBetween('C8H10O', 'C8H10O')).toBeNull();
    expect(lossBetween('C8H10O', 'C7H7O2')).toBeNull();
  });
});
