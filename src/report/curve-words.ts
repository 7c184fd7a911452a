import {
  adaptivePairs,
  type Crossing,
  crossingOf,
  LEAST_GAIN,
  leastPoint,
  trainingReturn,
} from '../compare/curve-findings.ts';
import type { CurveLine } from '../compare/curve-points.ts';
import type { Curve } from '../compare/curves.ts';
import { rateText } from './figures.ts';
import { countInText } from './paragraph.ts';

/** What the x of a curve is called: over the labels, and in a sentence. */
export function wordsOf(curve: Curve): { readonly head: string; readonly heading: string } {
  const coder = curve.lines[0].candidate.split(':')[0];
  if (curve.from === 'reset')
    return { head: 'R', heading: 'By reset message*R: forgotten every R messages' };
  switch (curve.over) {
    case 'train_share':
      return {
        head: 'share',
        heading: 'By share of the train part that is trained on, the last of it',
      };
    case 'message_symbols':
      return { head: 'symbols', heading: 'By symbols of a message' };
    case 'align':
      return { head: 'bits', heading: 'By alignment, the bits that each message is filled up to' };
    case 'tables_in_set':
      return { head: 'tables', heading: `${coder} by tables in a set` };
    case 'n':
      return coder === 'block-huffman'
        ? { head: 'n', heading: 'block-huffman by n, symbols in a block; 1 is huffman' }
        : { head: 'n', heading: `${coder} by n` };
    default:
      return { head: curve.over, heading: `${coder} by ${curve.over}` };
  }
}

/** What tells a line from the others of its curve. */
export function lineName(line: CurveLine, curve: Curve): string {
  const { lines } = curve;
  const several = (of: (one: CurveLine) => string): boolean => new Set(lines.map(of)).size > 1;
  const coder = line.candidate.split(':')[0];
  const parts: string[] = [];
  if (curve.from !== 'parameter' || several((one) => one.candidate)) {
    const own = line.candidate.slice(coder.length + 1);
    parts.push(curve.from === 'parameter' && own !== '' ? own : line.candidate);
  }
  if (line.tables !== 'none') parts.push(line.tables);
  if (curve.from !== 'reset' && several((one) => one.reset)) parts.push(`reset ${line.reset}`);
  return parts.length === 0 ? line.candidate : parts.join(' ');
}

function crossingText(candidate: string, crossing: Crossing): string {
  switch (crossing.kind) {
    case 'always':
      return `${candidate} learned needs no more than with shipped tables at every size here`;
    case 'never':
      return `${candidate} learned needs more than with shipped tables up to the largest size here`;
    case 'between': {
      const { from, to, about } = crossing;
      const near = countInText(Number(about.toPrecision(2)));
      return `${candidate} learned overtakes its shipped tables between ${countInText(from)} and ${countInText(to)} symbols (about ${near})`;
    }
  }
}

/** Most candidates whose crossing is told. */
const MOST_CROSSINGS = 4;

function crossingNotes(curve: Curve): string[] {
  const texts = adaptivePairs(curve).flatMap(({ adaptive, shipped }) => {
    const crossing = crossingOf(adaptive, shipped);
    return crossing === undefined ? [] : [crossingText(adaptive.candidate, crossing)];
  });
  return texts.length === 0 ? [] : [`${texts.slice(0, MOST_CROSSINGS).join('; ')}.`];
}

const percentText = (share: number): string => `${(share * 100).toFixed(1)} %`;

function trainingNotes(shown: readonly CurveLine[], markOf: (line: CurveLine) => string): string[] {
  const enough = new Map<number, string[]>();
  const more: string[] = [];
  for (const line of shown) {
    const found = trainingReturn(line);
    if (found.enough === undefined) more.push(`${markOf(line)} ${percentText(found.lastGain)}`);
    else enough.set(found.enough, [...(enough.get(found.enough) ?? []), markOf(line)]);
  }
  const parts = [...enough].map(([share, marks]) => `${marks.join(', ')} beyond ${share}`);
  const least = `${LEAST_GAIN * 100} %`;
  return [
    ...(parts.length === 0
      ? []
      : [`Doubling the training data gains less than ${least} of the rate: ${parts.join('; ')}.`]),
    ...(more.length === 0
      ? []
      : [`More training data still pay at the last step; gain of a doubling: ${more.join(', ')}.`]),
  ];
}

function leastNote(shown: readonly CurveLine[], markOf: (line: CurveLine) => string, head: string) {
  const parts = shown.map((line) => {
    const { x, rate } = leastPoint(line);
    const isLast = x === line.points.at(-1)!.x;
    return `${markOf(line)} ${rateText(rate)} at ${head} ${x}${isLast ? ', the last' : ''}`;
  });
  return `Least: ${parts.join('; ')}.`;
}

/** What a curve shows, in sentences. */
export function curveNotes(
  curve: Curve,
  shown: readonly CurveLine[],
  markOf: (line: CurveLine) => string,
): string[] {
  if (curve.from === 'reset' || curve.over === 'align') return [];
  if (curve.over === 'message_symbols') return crossingNotes(curve);
  if (curve.over === 'train_share') return trainingNotes(shown, markOf);
  return [leastNote(shown, markOf, wordsOf(curve).head)];
}
