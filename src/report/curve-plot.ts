import { padLeft, padRight } from './figures.ts';

/** One value of x: its figures, and the marks that stand at them. */
export interface CurveRow {
  readonly label: string;
  /** One for each column of figures; empty where a line has none. */
  readonly figures: readonly string[];
  readonly marks: readonly { readonly mark: string; readonly rate: number }[];
  readonly band?: { readonly low: number; readonly high: number };
}

export interface CurvePlotOptions {
  readonly columns: number;
  readonly ascii: boolean;
  /** Above the labels. */
  readonly title: string;
  /** Above each column of figures. */
  readonly heads: readonly string[];
}

const UNICODE = { axis: '│', left: '├', right: '┤', band: '─' };
const ASCII = { axis: '|', left: '[', right: ']', band: '-' };
/** Stands where several marks fall together. */
export const TOGETHER = '*';
/** Fewest and most characters of the plot beside the figures. */
export const LEAST_PLOT = 20;
const MOST_PLOT = 60;

/** Characters that labels and figures take, the axis too. */
export function figuresWidth(rows: readonly CurveRow[], title: string, heads: readonly string[]) {
  const labelWidth = Math.max([...title].length, ...rows.map((row) => [...row.label].length));
  const widths = heads.map((head, i) =>
    Math.max([...head].length, ...rows.map((row) => [...(row.figures[i] ?? '')].length)),
  );
  const total = 2 + labelWidth + widths.reduce((sum, width) => sum + width + 2, 0) + 3;
  return { labelWidth, widths, total };
}

/**
 * Figures by x, downwards, and beside each row marks at its rates over one scale from the least to the largest of all: a curve
 * lying on its side. The scale does not begin at 0.
 */
export function curvePlot(rows: readonly CurveRow[], options: CurvePlotOptions): string[] {
  const { columns, ascii, title, heads } = options;
  const marks = ascii ? ASCII : UNICODE;
  const { labelWidth, widths, total } = figuresWidth(rows, title, heads);
  const room = Math.min(MOST_PLOT, Math.max(LEAST_PLOT, columns - total));
  const rates = rows.flatMap((row) => [
    ...row.marks.map(({ rate }) => rate),
    ...(row.band === undefined ? [] : [row.band.low, row.band.high]),
  ]);
  const least = Math.min(...rates);
  const span = Math.max(...rates) - least;
  const columnOf = (rate: number): number =>
    span === 0 ? 0 : Math.round(((rate - least) / span) * (room - 1));
  const write = (label: string, figures: readonly string[], plot: string): string => {
    const cells = widths.map((width, i) => padLeft(figures[i] ?? '', width)).join('  ');
    return `  ${padLeft(label, labelWidth)}  ${cells}  ${plot}`.trimEnd();
  };
  const lines = rows.map((row) => {
    const plot = Array.from({ length: room }, () => ' ');
    if (row.band !== undefined) {
      const [from, to] = [columnOf(row.band.low), columnOf(row.band.high)];
      plot.fill(marks.band, from, to + 1);
      plot[from] = marks.left;
      plot[to] = marks.right;
    }
    const taken = new Set<number>();
    for (const { mark, rate } of row.marks) {
      const at = columnOf(rate);
      plot[at] = taken.has(at) ? TOGETHER : mark;
      taken.add(at);
    }
    return write(row.label, row.figures, `${marks.axis}${plot.join('')}`);
  });
  return [write(title, heads, scaleText(least, span, room)), ...lines];
}

/** Round rates over their columns; the axis has one character before the first. */
function scaleText(least: number, span: number, room: number): string {
  if (span === 0) return '';
  const step = roundStep(span / 4);
  const decimals = Math.max(0, Math.ceil(-Math.log10(step) - 1e-9));
  let line = '';
  for (let i = Math.ceil(least / step); i * step <= least + span; i++) {
    const text = (i * step).toFixed(decimals);
    const at = 1 + Math.round(((i * step - least) / span) * (room - 1));
    if ((line !== '' && at < line.length + 1) || at + text.length > room + 1) continue;
    line = padRight(line, at) + text;
  }
  return line;
}

/** The least of 1, 2, 5 times a power of ten that is no less than `step`. */
function roundStep(step: number): number {
  const power = 10 ** Math.floor(Math.log10(step));
  for (const times of [1, 2, 5]) if (times * power >= step) return times * power;
  return 10 * power;
}
