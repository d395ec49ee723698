import { describe, expect, it } from 'vitest';
import { groupDefaultsFormSchema } from './group-defaults-form';

const form = (fields: Record<string, string>) =>
  groupDefaultsFormSchema.safeParse({ version: '3', elements: '', adducts: '', approvalsNeeded: '1', ...fields });
const wrongFields = (fields: Record<string, string>) => form(fields).error?.issues.map(({ path }) => path[0]);

describe('the form of the defaults', () => {
  it('reads empty fields as the program’s own defaults', () => {
    expect(form({}).data).toEqual({
      version: 3,
      defaults: { tolerances: {}, elements: null, adducts: [], approvalsNeeded: 1 }
    });
  });
  it('reads windows by analyser, with point or comma', () => {
    expect(
      form({ 'ppm.orbitrap': '5', 'mda.orbitrap': '0,8', 'mda.ion-trap': '300' }).data?.defaults.tolerances
    ).toEqual({
      orbitrap: { ppm: 5, mda: 0.8 },
      // ppm is left empty: the program's own 10 ppm for ion traps
      'ion-trap': { ppm: 10, mda: 300 }
    });
  });
  it('names the field of a wrong window', () => {
    expect(wrongFields({ 'ppm.tof': 'wide' })).toEqual(['ppm.tof']);
    expect(wrongFields({ 'mda.tof': '-1' })).toEqual(['mda.tof']);
    expect(wrongFields({ 'ppm.tof': '0', 'mda.tof': '0' })).toEqual(['ppm.tof']);
  });
  it('checks element ranges and says what is wrong', () => {
    expect(form({ elements: 'C0-40H0-80O0-20' }).data?.defaults.elements).toBe('C0-40H0-80O0-20');
    expect(wrongFields({ elements: 'C0-40Xx3' })).toEqual(['elements']);
    expect(form({ elements: 'C9-4' }).error?.issues[0].message).toContain('C starts at 9 and ends at 4');
  });
  it('reads ion types line by line, each once, and names a wrong one', () => {
    expect(form({ adducts: '[M+H]+\n\n [M+Na]+ \n[M+H]+' }).data?.defaults.adducts).toEqual(['[M+H]+', '[M+Na]+']);
    expect(wrongFields({ adducts: '[M+H]+\nnonsense' })).toEqual(['adducts']);
  });
  it('keeps the number of approvals between 1 and 5', () => {
    for (const wrong of ['0', '6', '1.5', '', 'two'])
      expect(wrongFields({ approvalsNeeded: wrong })).toEqual(['approvalsNeeded']);
  });
});
