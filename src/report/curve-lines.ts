import { adaptivePairs } from '../compare/curve-findings.ts';
import { type CurveLine, leastRate } from '../compare/curve-points.ts';
import type { Curve, CurveEntropy } from '../compare/curves.ts';
import { type CurveRow, curvePlot, figuresWidth, LEAST_PLOT, TOGETHER } from './curve-plot.ts';
import { curveNotes, lineName, wordsOf } from './curve-words.ts';
import { countText, decimalsFor, rateText } from './figures.ts';
import { paragraph } from './paragraph.ts';

export interface CurveOptions {
  readonly columns: number;
  readonly ascii: boolean;
  /** `byte`, `symbol` … as in "bits/byte". */
  readonly noun: string;
}

/** Lines that one curve shows at most; the others stand in the record. */
const MOST_LINES = 4;
const ENTROPY_MARK = 'H';
const MARKS = 'ABCD';

const plusMinusOf = (ascii: boolean): string => (ascii ? '+-' : '±');

/**
 * The lines of least rate. Where messages grow, the best adaptive one and its shipped tables come first; over orders the best
 * and another form of the same coder with the same tables, as pure and back-off are.
 */
function chosenLines(curve: Curve): CurveLine[] {
  const first = firstLines(curve);
  return [...first, ...curve.lines.filter((line) => !first.includes(line))].slice(0, MOST_LINES);
}

function firstLines(curve: Curve): CurveLine[] {
  if (curve.over === 'message_symbols') {
    const [pair] = adaptivePairs(curve);
    return pair === undefined ? [] : [pair.adaptive, pair.shipped];
  }
  if (curve.over !== 'order') return [];
  const [best, ...others] = curve.lines;
  const form = others.find(({ tables, reset }) => tables === best.tables && reset === best.reset);
  return form === undefined ? [] : [best, form];
}

interface Drawing {
  readonly lines: readonly CurveLine[];
  readonly rows: readonly CurveRow[];
  readonly heads: readonly string[];
}

function drawingOf(
  curve: Curve,
  lines: readonly CurveLine[],
  margins: boolean,
  plusMinus: string,
): Drawing {
  const decimals = decimalsFor(Math.min(...lines.map(leastRate)));
  const xs = [...new Set(lines.flatMap(({ points }) => points.map(({ x }) => x)))].sort(
    (a, b) => a - b,
  );
  const figure = (rate: number, margin: number | undefined): string =>
    rateText(rate, decimals) +
    (margins && margin !== undefined ? ` ${plusMinus}${rateText(margin, decimals)}` : '');
  const entropyAt = (x: number): CurveEntropy | undefined =>
    curve.entropy?.find(({ k }) => k === x);
  return {
    lines,
    heads: [
      ...lines.map((_, i) => MARKS[i]),
      ...(curve.entropy === undefined ? [] : [ENTROPY_MARK]),
    ],
    rows: xs.map((x) => {
      const points = lines.map((line) => line.points.find((point) => point.x === x));
      const entropy = entropyAt(x);
      const isSound = entropy?.estimable === true;
      return {
        label: x >= 1000 ? countText(x) : String(x),
        figures: [
          ...points.map((point) => (point === undefined ? '' : figure(point.rate, point.margin))),
          ...(curve.entropy === undefined ? [] : [entropyText(entropy, decimals)]),
        ],
        marks: [
          ...(isSound ? [{ mark: ENTROPY_MARK, rate: entropy.point }] : []),
          ...points.flatMap((point, i) =>
            point === undefined ? [] : [{ mark: MARKS[i], rate: point.rate }],
          ),
        ],
        ...(isSound && entropy.low !== undefined
          ? { band: { low: entropy.low, high: entropy.high! } }
          : {}),
      };
    }),
  };
}

function entropyText(entropy: CurveEntropy | undefined, decimals: number): string {
  if (entropy === undefined) return '';
  const text = rateText(entropy.point, decimals);
  return entropy.estimable ? text : `(${text})`;
}

/** As many lines, and intervals, as leave room for the plot. */
function fittingDrawing(curve: Curve, title: string, { columns, ascii }: CurveOptions): Drawing {
  const chosen = chosenLines(curve);
  for (let count = chosen.length; ; count--) {
    for (const margins of [true, false]) {
      const drawing = drawingOf(curve, chosen.slice(0, count), margins, plusMinusOf(ascii));
      const { total } = figuresWidth(drawing.rows, title, drawing.heads);
      if (total + LEAST_PLOT <= columns || (count === 1 && !margins)) return drawing;
    }
  }
}

function legend(
  curve: Curve,
  { lines, rows }: Drawing,
  { noun, ascii }: CurveOptions,
  plot: string,
): string {
  const plusMinus = plusMinusOf(ascii);
  const names = lines.map((line, i) => `${MARKS[i]} ${lineName(line, curve)}`);
  if (curve.entropy !== undefined)
    names.push(
      `${ENTROPY_MARK} the corrected entropy of that order in its band${
        curve.entropy.every(({ estimable }) => estimable) ? '' : ' (in parentheses: not estimable)'
      }`,
    );
  if (plot.includes(TOGETHER)) names.push(`${TOGETHER} several`);
  const rest = curve.lines.length - lines.length;
  const others = rest === 0 ? '' : ` ${rest} more ${rest === 1 ? 'line' : 'lines'}: run record.`;
  const margins = rows.some((row) => row.figures.some((text) => text.includes(plusMinus)))
    ? ` ${plusMinus} is the 95 % interval over messages.`
    : '';
  return `${wordsOf(curve).heading}, bits/${noun}: ${names.join(', ')}.${margins}${others}`;
}

/** One curve on a terminal: what it goes over, figures and plot, what it shows. */
function oneCurve(curve: Curve, options: CurveOptions): string[] {
  const { columns, ascii } = options;
  const { head } = wordsOf(curve);
  const drawing = fittingDrawing(curve, head, options);
  const { lines, rows, heads } = drawing;
  const plot = curvePlot(rows, { columns, ascii, title: head, heads });
  const markOf = (line: CurveLine): string => MARKS[lines.indexOf(line)];
  return [
    ...paragraph(legend(curve, drawing, options, plot.join('')), columns),
    '',
    ...plot,
    '',
    ...curveNotes(curve, lines, markOf).flatMap((note) => paragraph(note, columns)),
  ];
}

/**
 * The curves of a corpus on a terminal, those at the plan's own values of all else that it varies; that there are others is
 * said.
 */
export function curveLines(curves: readonly Curve[], options: CurveOptions): string[] {
  const own = curves.filter(({ variation }) => variation === '');
  const lines = own.flatMap((curve) => ['', ...oneCurve(curve, options)]);
  if (own.length < curves.length)
    lines.push(
      ...paragraph(
        'Combinations of what the plan varies have curves of their own; their cells stand in the run record.',
        options.columns,
      ),
    );
  return lines;
}
