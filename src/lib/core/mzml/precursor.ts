/** The `precursor` elements of a spectrum. */
import type { PrecursorRecord } from '../model';
import { ACTIVATIONS, CV } from './cv';
import type { FilterString } from './filter-string';
import { Params, type ParamGroups } from './params';
import type { PrecursorText } from './record';
import { detached } from './detached';

type Energy = Pick<PrecursorRecord, 'energy' | 'energyUnit'>;

function readIsolation(params: Params): PrecursorRecord['isolation'] {
  const target = params.number(CV.isolationTarget);
  if (target !== null && target > 0) {
    return {
      target,
      lower: positive(params.number(CV.isolationLower)),
      upper: positive(params.number(CV.isolationUpper))
    };
  }
  const low = params.number(CV.oldIsolationLower);
  const high = params.number(CV.oldIsolationUpper);
  if (low === null || high === null || high <= low) return null;
  return { target: (low + high) / 2, lower: (high - low) / 2, upper: (high - low) / 2 };
}

function positive(value: number | null): number | null {
  return value !== null && value > 0 ? value : null;
}

function readEnergy(params: Params): Energy {
  const collision = params.number(CV.collisionEnergy);
  if (collision !== null) {
    const unit = params.find(CV.collisionEnergy)?.unit;
    return { energy: collision, energyUnit: unit === CV.percent ? '%' : unit === null ? null : 'eV' };
  }
  const normalized = params.number(CV.normalizedEnergy);
  if (normalized !== null) return { energy: normalized, energyUnit: '%' };
  const activation = params.number(CV.activationEnergy);
  const unit = params.find(CV.activationEnergy)?.unit;
  return { energy: activation, energyUnit: activation !== null && unit === CV.electronvolt ? 'eV' : null };
}

/** Stage of the scan the ion was isolated from: userParam "ms level", in the isolation window or (older) the precursor. */
function readLevel(written: PrecursorText, window: Params, groups: ParamGroups): number | null {
  const text = window.user('ms level') ?? Params.of(written.params, groups).user('ms level');
  const level = text === null ? NaN : Number(text);
  return Number.isInteger(level) && level > 0 ? level : null;
}

function readActivations(activation: Params): string[] {
  const names: string[] = [];
  for (const { accession } of activation.all) {
    const name = accession === null ? undefined : ACTIVATIONS.get(accession);
    if (name !== undefined && !names.includes(name)) names.push(name);
  }
  return names;
}

/** One precursor record. */
export function readPrecursor(written: PrecursorText, groups: ParamGroups): PrecursorRecord {
  const window = Params.of(written.window, groups);
  const ion = Params.of(written.ion, groups);
  const activation = Params.of(written.activation, groups);
  const charge = ion.number(CV.charge, CV.possibleCharge);
  return {
    spectrumRef: written.spectrumRef ? detached(written.spectrumRef) : null,
    level: readLevel(written, window, groups),
    isolation: readIsolation(window),
    selectedMz: positive(ion.number(CV.selectedMz, CV.oldSelectedMz)),
    charge: charge === null || Math.round(charge) === 0 ? null : Math.abs(Math.round(charge)),
    intensity: ion.number(CV.peakIntensity),
    activations: readActivations(activation),
    ...readEnergy(activation)
  };
}

/**
 * Where the filter string names a more specific activation of the same ion (HCD where the parameter says the general
 * CID), that one is kept; where there is no record at all, the filter string's last stage makes one.
 */
export function mergeFilter(precursors: PrecursorRecord[], filter: FilterString | null): PrecursorRecord[] {
  const stages = filter?.path ?? [];
  const last = stages.at(-1);
  if (!last) return precursors;
  if (precursors.every((record) => record.isolation === null && record.selectedMz === null)) {
    return [
      {
        spectrumRef: precursors[0]?.spectrumRef ?? null,
        level: stages.length,
        isolation: { target: last.mz, lower: null, upper: null },
        selectedMz: null,
        charge: precursors[0]?.charge ?? null,
        intensity: null,
        activations: last.activations,
        energy: last.energy,
        energyUnit: null
      }
    ];
  }
  return precursors.map((record) => {
    const mz = record.isolation?.target ?? record.selectedMz ?? 0;
    const stage = stages.findLast((candidate) => Math.abs(candidate.mz - mz) < 0.01);
    if (!stage || stage.activations.length === 0) return record;
    const general =
      record.activations.length === 0 || (record.activations.length === 1 && record.activations[0] === 'CID');
    return {
      ...record,
      activations: general ? stage.activations : record.activations,
      energy: record.energy ?? stage.energy
    };
  });
}
