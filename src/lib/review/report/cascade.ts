import type { FrozenSpectrum } from '../content';
import { chargeText } from './columns';
import { placeLabels, type Box } from './labels';
import { mzDecimals, type Report, type ReportRow } from './model';
import { formulaAt, formulaWidth, head, INK, line, monoWidth, n, stateColour, svgDocument, textAt } from './svg';

const WIDTH = 960;
const LEFT = 132;
const RIGHT = WIDTH - 16;
const TOP = 44;
/** Height of a lane, and of its tallest stick. */
const LANE = 112;
const STICK = 62;
const LABEL = 10.5;

interface Scale {
  low: number;
  high: number;
  x: (mz: number) => number;
}

/** Ticks at a round step, five to ten of them. */
export function ticks(low: number, high: number): number[] {
  const rough = (high - low) / 8;
  const power = 10 ** Math.floor(Math.log10(rough));
  const step = [1, 2, 2.5, 5, 10].map((m) => m * power).find((s) => s >= rough) ?? 10 * power;
  const found: number[] = [];
  for (let k = Math.ceil(low / step); k * step <= high; k++) found.push(Number((k * step).toFixed(6)));
  return found;
}

function scaleOf(report: Report): Scale {
  const all = [...report.rows.map((row) => row.found), ...report.spectra.flatMap((s) => s.path)];
  const [least, most] = all.length ? [Math.min(...all), Math.max(...all)] : [0, 100];
  const margin = Math.max((most - least) * 0.05, 2);
  const [low, high] = [Math.max(0, least - margin), most + margin];
  return { low, high, x: (mz) => LEFT + ((mz - low) / (high - low)) * (RIGHT - LEFT) };
}

const activationText = (s: FrozenSpectrum): string => {
  const energies = s.energies.length
    ? ` ${[...new Set(s.energies)].slice(0, 3).join('/')}${s.energyUnit === 'eV' ? ' eV' : ''}`
    : '';
  const scans = `${s.scanCount} scan${s.scanCount === 1 ? '' : 's'}`;
  return [`${s.activations.join('+')}${energies}`.trim(), scans].filter(Boolean).join(', ');
};

function laneHead(spectrum: FrozenSpectrum, base: number, decimals: number): string {
  const isolated = spectrum.path.at(-1);
  return [
    textAt(16, base - 30, 'MS', { size: 15, medium: true }),
    textAt(38.5, base - 36, String(spectrum.level), { size: 10.5, medium: true }),
    isolated === undefined ? '' : textAt(16, base - 14, isolated.toFixed(decimals), { size: 11, mono: true }),
    textAt(16, base, activationText(spectrum), { size: 9.5, fill: INK.ink2 }),
    line(LEFT, base, RIGHT, base, INK.rule, 1)
  ].join('');
}

const stickTop = (row: ReportRow, base: number): number => base - Math.max(2, (row.intensity / 100) * STICK);

function stick(row: ReportRow, base: number, scale: Scale): string {
  const x = scale.x(row.found);
  const top = stickTop(row, base);
  const faint = row.state === 'open' || row.state === 'rejected';
  return (
    line(x, base, x, top, stateColour[row.state], faint ? 1.2 : 1.8) +
    head(row.state, x, row.state === 'rejected' ? top - 4 : top)
  );
}

/** Sticks drawn in one lane at most; the table lists what is weaker. */
const MOST_STICKS = 150;
const strongest = (rows: readonly ReportRow[]): ReportRow[] =>
  [...rows].sort((a, b) => b.intensity - a.intensity).slice(0, MOST_STICKS);

/** m/z above each stick, with the formula over it, strongest first, as far as there is room. */
function labelsOf(
  rows: readonly ReportRow[],
  base: number,
  scale: Scale,
  decimals: number,
  arrows: readonly Box[]
): string {
  const ranked = [...rows].sort((a, b) => b.intensity - a.intensity);
  const heads: Box[] = ranked.slice(0, 60).map((row) => {
    const [x, top] = [scale.x(row.found), stickTop(row, base)];
    return { left: x - 2, right: x + 2, top: top - 4, bottom: base };
  });
  const wanted = ranked.map((row) => {
    const mz = row.found.toFixed(decimals);
    const charge = row.formula ? chargeText(row.charge, row.oddElectron) : '';
    const width = Math.max(monoWidth(mz, LABEL), row.formula ? formulaWidth(row.formula, LABEL, charge) : 0);
    const bottom = stickTop(row, base) - 8;
    return { row, mz, charge, x: scale.x(row.found), bottom, width, height: row.formula ? 25 : 12 };
  });
  const places = placeLabels(wanted, LEFT - 20, RIGHT + 12, [...heads, ...arrows]);
  return wanted
    .map(({ row, mz, charge, bottom }, i) => {
      const x = places[i];
      if (x === null) return '';
      const formula = row.formula
        ? formulaAt(x - formulaWidth(row.formula, LABEL, charge) / 2, bottom - 12.5, row.formula, {
            size: LABEL,
            charge
          })
        : '';
      return formula + textAt(x, bottom, mz, { size: LABEL, mono: true, anchor: 'middle', fill: INK.ink2 });
    })
    .join('');
}

/** From the isolated ion in its lane down to the head of the lane that it opened. */
function connector(x: number, from: number, to: number): string {
  return (
    line(x, from + 1, x, to - 6, INK.ink, 1.5) + `<path d="M${n(x - 4.5)} ${n(to - 7)}h9l-4.5 7z" fill="${INK.ink}"/>`
  );
}

function axis(scale: Scale, y: number): string {
  const marks = ticks(scale.low, scale.high).map((mz) => {
    const x = scale.x(mz);
    return (
      line(x, y, x, y + 5, INK.ink3, 1) +
      textAt(x, y + 17, String(mz), { size: 10, mono: true, anchor: 'middle', fill: INK.ink2 })
    );
  });
  const name = `<text x="${n(RIGHT)}" y="${n(y + 32)}" font-family="'IBM Plex Sans', sans-serif" font-size="11" font-style="italic" fill="${INK.ink2}" text-anchor="end">m/z</text>`;
  return line(LEFT, y, RIGHT, y, INK.ink3, 1) + marks.join('') + name;
}

function legend(y: number): string {
  const entries = [
    ['confirmed', 'confirmed'],
    ['proposed', 'proposed'],
    ['open', 'open'],
    ['rejected', 'rejected']
  ] as const;
  let x = LEFT;
  const drawn = entries.map(([state, word]) => {
    const mark = line(x, y + 3, x, y - 6, stateColour[state], 1.6) + head(state, x, y - 6);
    const text = textAt(x + 9, y, word, { size: 10.5, fill: INK.ink2 });
    x += 82;
    return mark + text;
  });
  drawn.push(
    connector(x, y - 9, y + 3),
    textAt(x + 10, y, 'isolated and fragmented (measured)', { size: 10.5, fill: INK.ink2 })
  );
  return drawn.join('');
}

/**
 * Every spectrum a lane on one shared m/z axis, stage below stage; from an isolated ion a connector drops to the lane it
 * opened. Labels never overlap. @returns SVG text in px units
 */
export function cascadeSvg(report: Report): string {
  const decimals = mzDecimals(report);
  const scale = scaleOf(report);
  const lanes = [...report.spectra].sort((a, b) => a.level - b.level || a.index - b.index);
  const baseOf = new Map(lanes.map((s, i) => [s.index, TOP + (i + 1) * LANE - 8]));
  const arrows = lanes.flatMap((s) => {
    const [from, isolated] = [s.parent === null ? undefined : baseOf.get(s.parent), s.path.at(-1)];
    return from === undefined || isolated === undefined
      ? []
      : [{ x: scale.x(isolated), from, to: baseOf.get(s.index)! }];
  });
  const blocked = arrows.map(({ x, from, to }): Box => ({ left: x - 3, right: x + 3, top: from + 1, bottom: to }));
  const body = lanes.map((spectrum) => {
    const base = baseOf.get(spectrum.index)!;
    const own = strongest(report.rows.filter((row) => row.spectrum === spectrum.index));
    return (
      laneHead(spectrum, base, decimals) +
      own.map((row) => stick(row, base, scale)).join('') +
      labelsOf(own, base, scale, decimals, blocked)
    );
  });
  const bottom = TOP + lanes.length * LANE + 4;
  const drawn =
    legend(20) + arrows.map((a) => connector(a.x, a.from, a.to)).join('') + body.join('') + axis(scale, bottom);
  const description = `${lanes.length} spectra with ${report.rows.length} ions on one m/z axis; connectors lead from isolated ions to the spectra they gave.`;
  return svgDocument(WIDTH, bottom + 42, `Cascade of ${report.title}`, description, drawn);
}
