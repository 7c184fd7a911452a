import type { CorpusSpec, RawCorpus } from '../corpus/corpus.ts';
import { decideSplit, type SplitRule } from '../corpus/decide-split.ts';
import { fixAlphabet } from '../corpus/fix-alphabet.ts';
import { foldCuts, foldsOf, trainRanges } from '../corpus/folds.ts';
import { loadRawCorpus } from '../corpus/intake.ts';
import { recutRaw, symbolsPerMessage } from '../corpus/recut.ts';
import { repeatedMessages } from '../corpus/repeated-messages.ts';
import { splitCorpus } from '../corpus/split.ts';
import { lastShare } from '../corpus/train-share.ts';
import type { SymbolSequence } from '../symbols/sequence.ts';
import type { CorpusData } from './corpus-data.ts';
import { factsOf, unsplitData } from './load-corpus-data.ts';
import { type DataVariation, dataKeyOf } from './variation.ts';

/** The data that a plan asks for besides its own. */
export interface DataVariations {
  readonly messageSymbols?: readonly number[];
  readonly trainShares?: readonly number[];
}

/**
 * Reads a corpus once and gives all the data that cells of a plan code: its own first, then each variation, message sizes
 * outermost, then shares of the train part, then folds. Symbols are shared between them wherever their alphabet is the same;
 * folds share an array of twice the symbols.
 *
 * A variation equals what a plan that said so would give: messages of N symbols those of `every=N` (or so many records),
 * split anew. An alphabet that is found in data is found on the whole train part, however little of it tables are trained on.
 * @param rule  absent: nothing trains, and all data are coded
 * @throws what intake and split throw, and InputError for what leaves nothing to train on
 */
export async function loadVariedData(
  spec: CorpusSpec,
  baseFolder: string,
  rule: SplitRule | undefined,
  vary: DataVariations,
): Promise<CorpusData[]> {
  const raw = await loadRawCorpus(spec, baseFolder);
  const own = symbolsPerMessage(spec);
  const others = (vary.messageSymbols ?? []).filter((count) => count !== own);
  const framings: [RawCorpus, DataVariation][] = [
    [raw, {}],
    ...others.map((count): [RawCorpus, DataVariation] => [
      recutRaw(raw, spec, count),
      { messageSymbols: count },
    ]),
  ];
  const shares = (vary.trainShares ?? []).filter((share) => share !== 1);
  return framings.flatMap(([framed, variation]) =>
    partsOf(framed, spec, rule, variation).flatMap((whole) => [
      whole,
      ...(rule === undefined ? [] : shares.map((share) => withShare(whole, share, rule))),
    ]),
  );
}

/** One framing of a corpus, split once, or into folds. */
function partsOf(
  raw: RawCorpus,
  spec: CorpusSpec,
  rule: SplitRule | undefined,
  variation: DataVariation,
): CorpusData[] {
  if (rule === undefined) return [varied(unsplitData(fixAlphabet(raw), spec), variation)];
  if (rule.folds === undefined) {
    const split = decideSplit(raw, rule);
    const corpus = fixAlphabet(raw, split);
    const { train, test, testFileEnds, repeated } = splitCorpus(corpus, split);
    const facts = factsOf(corpus, testFileEnds, spec);
    return [varied(splitData(facts, train, test, repeated), variation)];
  }
  const cuts = foldCuts(raw, rule.by, rule.folds);
  const corpora = Array.from({ length: rule.folds }, (_, i) => {
    // Found on each fold's own train part: where no test symbol lies outside it, that is the same for all.
    return i > 0 && raw.values.kind === 'symbols'
      ? undefined
      : fixAlphabet(raw, { train: trainRanges(cuts, i) });
  });
  const corpus = corpora[0]!;
  return foldsOf(corpus, cuts).map(({ train, test, testFileEnds }, i) => {
    const facts = factsOf(corpus, testFileEnds, spec);
    const data = splitData(facts, train, test, repeatedMessages(train, test));
    return varied(data, { ...variation, fold: i + 1 });
  });
}

function splitData(
  facts: Omit<CorpusData, 'test'>,
  train: SymbolSequence,
  test: SymbolSequence,
  mask: Uint8Array,
): CorpusData {
  let count = 0;
  for (const one of mask) count += one;
  return { ...facts, train, test, repeated: { share: count / mask.length, mask } };
}

function varied(data: CorpusData, variation: DataVariation): CorpusData {
  const key = dataKeyOf(data.name, variation);
  return key === data.name ? data : { ...data, key, vary: variation };
}

function withShare(whole: CorpusData, share: number, rule: SplitRule): CorpusData {
  const train = lastShare(whole.train!, share, rule.by, whole.fill !== undefined, whole);
  const { train: _, test, repeated: __, ...facts } = whole;
  const data = splitData(facts, train, test, repeatedMessages(train, test));
  return varied(data, { ...whole.vary, trainShare: share });
}
