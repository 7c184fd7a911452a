import type { CorporaChoice } from '../compare/choose-corpora.ts';
import type { Alternative, CorpusChoice } from '../compare/choose-corpus.ts';
import type { LimitVerdict } from '../compare/limits.ts';
import type { Sensitivity } from '../compare/sensitivity.ts';
import type { BreakEven } from '../compare/yearly-cost.ts';
import { figureText, limitWords, withInterval } from './choose-review.ts';
import { rateText, speedText } from './figures.ts';
import { paragraph } from './paragraph.ts';
import { textTable } from './text-table.ts';

const SIGN: Readonly<Record<string, string>> = { max: '≤', min: '≥' };

function limitText({ key, limit }: LimitVerdict): string {
  const sign = SIGN[key.slice(0, key.indexOf('.'))];
  return sign === undefined ? String(limit) : `${sign} ${figureText(Number(limit))}`;
}

function certaintyText({ key, verdict, certain, low }: LimitVerdict): string {
  if (verdict === 'unknown') return 'not measured';
  const word = certain ? '' : ' (open)';
  const declared = /flash|ram|code_bytes/.test(key);
  return `${verdict}${word}${declared && low === undefined ? ', declared' : ''}`;
}

/** Each limit with what is left of it. */
export function roomTable({ verdicts }: Alternative): string[] {
  return textTable(
    [
      { title: 'limit', right: false },
      { title: 'allowed', right: true },
      { title: 'pick', right: true },
      { title: 'room', right: true },
      { title: 'verdict', right: false },
    ],
    verdicts.map((v) => [
      limitWords(v.key),
      limitText(v),
      withInterval(v),
      v.margin === undefined ? '–' : `${Math.round(100 * v.margin)} %`,
      certaintyText(v),
    ]),
  );
}

const sizeOf = (a: Alternative, key: 'flash_bytes' | 'ram_bytes'): string => {
  const figure = a.figures.of(key);
  return figure === undefined ? '–' : figureText(figure.value);
};

/** Limits in one word each, for a column. */
const SHORT_WORDS: Readonly<Record<string, string>> = {
  flash_bytes: 'flash',
  ram_bytes: 'RAM',
  code_bytes: 'code',
  cycles_per_symbol: 'cycles',
  message_bytes_mean: 'mean',
  message_bytes_p50: 'p50',
  message_bytes_p95: 'p95',
  message_bytes_p99: 'p99',
  message_bytes_max: 'max',
  encode_speed: 'encode',
  decode_speed: 'decode',
  units_per_message: 'units',
};

function brokenText({ verdicts }: Alternative): string {
  return verdicts
    .filter(({ verdict }) => verdict !== 'pass')
    .map(({ key }) => key.slice(key.indexOf('.') + 1))
    .map((name) => SHORT_WORDS[name] ?? name)
    .join(' ');
}

/** Cells that nothing dominates, best by the goal first. */
export function frontTable({ alternatives, goal, pick }: CorpusChoice, columns: number): string[] {
  const front = alternatives
    .filter(({ onFront }) => onFront)
    .toSorted((a, b) => a.cell.rate! - b.cell.rate!);
  const filled =
    goal === 'units per message' || front.some((a) => a.cell.units_per_message !== undefined);
  const cycles = front.some((a) => a.figures.of('cycles_per_symbol') !== undefined);
  const rows = front.map((a) => {
    const { cell } = a;
    return [
      `${a.cell.id === pick?.cell.id ? '▸ ' : '  '}${cell.candidate}`,
      cell.tables === 'none' ? '–' : cell.tables,
      ...(filled ? [figureText(cell.units_per_message?.mean ?? 0)] : []),
      rateText(cell.rate!, 3),
      cycles
        ? figureText(a.figures.of('cycles_per_symbol')?.value ?? Number.POSITIVE_INFINITY)
        : cell.encode === undefined
          ? '–'
          : speedText(cell.encode),
      sizeOf(a, 'flash_bytes'),
      sizeOf(a, 'ram_bytes'),
      a.rank === undefined ? '–' : String(a.rank),
      brokenText(a),
    ];
  });
  const lines = textTable(
    [
      { title: '  candidate', right: false },
      { title: 'tables', right: false },
      ...(filled ? [{ title: 'units', right: true }] : []),
      { title: 'bits', right: true },
      { title: cycles ? 'cycles' : 'encode', right: true },
      { title: 'flash', right: true },
      { title: 'RAM', right: true },
      { title: 'rank', right: true },
      { title: 'breaks', right: false },
    ],
    rows,
  );
  return lines.map((line) =>
    [...line].length < columns ? line : `${[...line].slice(0, columns - 2).join('')}…`,
  );
}

/** A cell's id without the corpus that the heading names. */
const shortId = (id: string): string => id.slice(id.indexOf('/') + 1);

/** The other cells, each behind the one that is better in everything. */
export function dominatedLines({ alternatives }: CorpusChoice, columns: number): string[] {
  const by = new Map<string, string[]>();
  for (const { cell, dominatedBy } of alternatives) {
    if (dominatedBy === undefined) continue;
    by.set(dominatedBy, [...(by.get(dominatedBy) ?? []), shortId(cell.id)]);
  }
  return [...by].flatMap(([better, worse]) =>
    paragraph(
      `${shortId(better)} is as good or better in everything than ${worse.join(', ')}.`,
      columns,
    ),
  );
}

/** Where the pick changes, limit by limit. */
export function sensitivityLines(sensitivities: readonly Sensitivity[], columns: number): string[] {
  const scaling = sensitivities.filter(
    ({ key, stretches }) =>
      key.startsWith('cost.') && key !== 'cost.bill_step_bytes' && stretches.length === 1,
  );
  const lines = sensitivities
    .filter((s) => !scaling.includes(s))
    .flatMap(({ key, at, stretches }) => {
      const parts = stretches.map(
        ({ from, to, pick }) =>
          `${figureText(from)} to ${figureText(to)}: ${pick === undefined ? 'nothing meets the limits' : shortId(pick)}`,
      );
      return paragraph(`${limitWords(key)} (now ${figureText(at)}): ${parts.join('; ')}`, columns);
    });
  if (scaling.length > 0) {
    const words = scaling.map(({ key }) => limitWords(key)).join(', ');
    lines.push(
      ...paragraph(`${words}: every cell costs more or less alike, so the pick stays.`, columns),
    );
  }
  return lines;
}

/** What the memory that a cheaper cell takes may cost. */
export function breakEvenLines(
  breakEvens: readonly BreakEven[],
  currency: string,
  columns: number,
): string[] {
  return breakEvens.flatMap(
    ({ cheaper, smaller, extraFlashBytes, extraRamBytes, savedPerDeviceYear }) => {
      const extra = [
        extraFlashBytes > 0 ? `${figureText(extraFlashBytes)} bytes more flash` : '',
        extraRamBytes > 0 ? `${figureText(extraRamBytes)} bytes more RAM` : '',
      ].filter((text) => text !== '');
      return paragraph(
        `${shortId(cheaper)} against ${shortId(smaller)}: ${extra.join(' and ')} pay as long as they cost less than ${figureText(savedPerDeviceYear)} ${currency} a device and year.`,
        columns,
      );
    },
  );
}

/** One coder for all corpora against one for each. */
export function acrossLines(
  { weights, shared, leastWorst }: CorporaChoice,
  columns: number,
): string[] {
  const weightText = [...weights].map(([name, w]) => `${name} ${Math.round(100 * w)} %`).join(', ');
  const lines = paragraph(`Weights: ${weightText}.`, columns);
  const [best] = shared;
  if (best === undefined) {
    return [
      ...lines,
      ...paragraph('No coder meets the limits on every corpus: ship one for each.', columns),
    ];
  }
  const percent = (share: number) => `${(100 * share).toFixed(1)} %`;
  lines.push(
    ...paragraph(
      `One coder for all: ${best.coder} sends ${percent(best.weightedRegret)} more than the best for each; worst corpus ${percent(best.worstRegret)}.`,
      columns,
    ),
  );
  if (leastWorst !== undefined && leastWorst.coder !== best.coder) {
    lines.push(
      ...paragraph(
        `Least regret in the worst corpus: ${leastWorst.coder}, ${percent(leastWorst.worstRegret)} there and ${percent(leastWorst.weightedRegret)} over all.`,
        columns,
      ),
    );
  }
  return lines;
}
