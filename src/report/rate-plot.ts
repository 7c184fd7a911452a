import { padRight, rateText } from './figures.ts';

/** One row of a plot: a rate, with its band where there is one. */
export interface PlotRow {
  readonly label: string;
  /** Bits per symbol, like all here. */
  readonly point: number;
  readonly low?: number;
  readonly high?: number;
  /** The figure is not to be relied on: drawn open, without a band. */
  readonly faint: boolean;
}

export interface PlotOptions {
  /** Characters of a line at most. */
  readonly width: number;
  readonly ascii: boolean;
  /** A rate that is drawn as a line through all rows. */
  readonly ceiling?: { readonly name: string; readonly rate: number };
}

interface Marks {
  readonly axis: string;
  readonly left: string;
  readonly right: string;
  readonly band: string;
  readonly point: string;
  readonly open: string;
  readonly ceiling: string;
}

const UNICODE: Marks = {
  axis: '│',
  left: '├',
  right: '┤',
  band: '─',
  point: '●',
  open: '○',
  ceiling: '┊',
};
const ASCII: Marks = {
  axis: '|',
  left: '[',
  right: ']',
  band: '-',
  point: '*',
  open: 'o',
  ceiling: ':',
};

/** Marks of the scale above the plot. */
const SCALE_MARKS = 5;
/** The scale ends no lower, in bits: below it rates are all shown at 0. */
const LEAST_SCALE = 0.001;

/**
 * Rates as rows of marks over one scale from 0 bits: filled points with their bands, open points for what is not to be
 * relied on, the ceiling as a line down through all rows.
 */
export function ratePlot(rows: readonly PlotRow[], options: PlotOptions): string[] {
  const { width, ceiling } = options;
  const marks = options.ascii ? ASCII : UNICODE;
  const labelWidth = Math.max(...rows.map((row) => [...row.label].length), 'ceiling'.length);
  const cells = Math.max(20, width - labelWidth - 3);
  const most = Math.max(
    LEAST_SCALE,
    ceiling?.rate ?? 0,
    ...rows.map((row) => Math.max(row.point, row.faint ? 0 : (row.high ?? 0))),
  );
  const columnOf = (rate: number): number => Math.round((rate / most) * (cells - 1));
  const ceilingAt = ceiling === undefined ? -1 : columnOf(ceiling.rate);
  const write = (label: string, line: string): string =>
    ` ${padRight(label, labelWidth)} ${marks.axis}${line}`.trimEnd();
  const lines = rows.map((row) => {
    const line = Array.from({ length: cells }, (_, c) => (c === ceilingAt ? marks.ceiling : ' '));
    if (!row.faint && row.low !== undefined && row.high !== undefined) {
      const from = columnOf(row.low);
      const to = columnOf(row.high);
      for (let c = from; c <= to; c++) line[c] = marks.band;
      line[from] = marks.left;
      line[to] = marks.right;
    }
    line[columnOf(row.point)] = row.faint ? marks.open : marks.point;
    return write(row.label, line.join(''));
  });
  if (ceiling !== undefined) {
    const text = `${rateText(ceiling.rate)} ${ceiling.name}`;
    const fitsRight = ceilingAt + 2 + [...text].length <= cells;
    const line = fitsRight
      ? `${' '.repeat(ceilingAt)}${marks.ceiling} ${text}`
      : `${' '.repeat(Math.max(0, ceilingAt - 1 - [...text].length))}${text} ${marks.ceiling}`;
    lines.push(write('ceiling', line));
  }
  return [scaleLine(most, cells, labelWidth), ...lines];
}

/** Round rates above their columns. */
function scaleLine(most: number, cells: number, labelWidth: number): string {
  const step = roundStep(most / SCALE_MARKS);
  let line = ' '.repeat(labelWidth + 3);
  const start = [...line].length;
  for (let i = 0; i * step <= most; i++) {
    const text = String(Number((i * step).toPrecision(3)));
    const column = start + Math.round(((i * step) / most) * (cells - 1));
    if (column < [...line].length || column + text.length > start + cells) continue;
    line = `${padRight(line, column)}${text} `;
  }
  return line.trimEnd();
}

/** The least of 1, 2, 5 times a power of ten that is no less than `step`. */
function roundStep(step: number): number {
  const power = 10 ** Math.floor(Math.log10(step));
  for (const times of [1, 2, 5]) if (times * power >= step) return times * power;
  return 10 * power;
}

/** What the marks mean, as one sentence. */
export function plotLegend(ascii: boolean): string {
  const marks = ascii ? ASCII : UNICODE;
  const band = `${marks.left}${marks.band}${marks.point}${marks.band}${marks.right}`;
  return `${band} an estimate in its 95 % interval (the floor: in its band), ${marks.open} not estimable, ${marks.ceiling} the lowest ceiling, a bound.`;
}

const SPARK_UNICODE = '▁▂▃▄▅▆▇█';
const SPARK_ASCII = '12345678';

/** Values as a row of eight heights between their least and largest; equal values are all lowest. */
export function heightRow(values: readonly number[], ascii: boolean): string {
  const heights = ascii ? SPARK_ASCII : SPARK_UNICODE;
  const least = Math.min(...values);
  const span = Math.max(...values) - least;
  return values
    .map((v) => heights[span === 0 ? 0 : Math.min(7, Math.floor(((v - least) / span) * 8))])
    .join('');
}
