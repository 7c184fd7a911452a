import { BitWriter } from '../bits/bit-writer.ts';
import type { Corpus, CorpusSpec } from '../corpus/corpus.ts';
import type { SplitRule } from '../corpus/decide-split.ts';
import { loadCorpus, loadSplitCorpus } from '../corpus/intake.ts';
import { symbolsPerMessage } from '../corpus/recut.ts';
import { writeAlphabetMap } from '../symbols/alphabet-map.ts';
import type { CorpusData } from './corpus-data.ts';

/**
 * Reads one corpus and parts it as `rule` says; without a rule nothing trains and all data are coded.
 * @throws what intake and split throw
 */
export async function loadCorpusData(
  spec: CorpusSpec,
  baseFolder: string,
  rule: SplitRule | undefined,
): Promise<CorpusData> {
  if (rule === undefined) {
    return unsplitData(await loadCorpus(spec, baseFolder), spec);
  }
  const { corpus, parts } = await loadSplitCorpus(spec, baseFolder, rule);
  return {
    ...factsOf(corpus, parts.testFileEnds, spec),
    train: parts.train,
    test: parts.test,
    repeated: { share: parts.repeatedShare, mask: parts.repeated },
  };
}

/** A corpus whose data are all coded, with its alphabet map where one must be sent. */
export function unsplitData(corpus: Corpus, spec: CorpusSpec): CorpusData {
  const { alphabet } = corpus;
  const data = { ...factsOf(corpus, corpus.fileEnds, spec), test: corpus.sequence };
  if (alphabet.kind !== 'map') return data;
  const writer = new BitWriter();
  const bits = writeAlphabetMap(writer, alphabet.map);
  return { ...data, sentMap: { bytes: writer.finish().bytes, bits } };
}

/** @param fileEnds  of the part that is coded, in its messages */
export function factsOf(
  corpus: Corpus,
  fileEnds: Uint32Array,
  spec: CorpusSpec,
): Omit<CorpusData, 'test'> {
  const messageSymbols = symbolsPerMessage({ ...spec, messages: corpus.messagesAs });
  const takesBytes = corpus.symbolsAs === 'bytes' && corpus.alphabet.kind === 'natural';
  return {
    name: corpus.name,
    key: corpus.name,
    sha256: corpus.sha256,
    symbolsAs: corpus.symbolsAs,
    messagesAs: corpus.messagesAs,
    ...(messageSymbols === undefined ? {} : { messageSymbols }),
    lengths: corpus.lengths,
    alphabetSize: corpus.sequence.alphabetSize,
    ...(takesBytes && corpus.record !== undefined ? { record: corpus.record } : {}),
    ...(spec.fields === undefined ? {} : { fields: spec.fields }),
    ...(corpus.fill === undefined ? {} : { fill: corpus.fill }),
    ...(corpus.sample === undefined ? {} : { sample: corpus.sample }),
    sourceBytes: corpus.sourceBytes,
    testFiles: corpus.files.map(({ path, sha256 }, i) => ({
      path,
      sha256,
      messageEnd: fileEnds[i],
    })),
  };
}

/** How train and test were parted, in words. */
export function describeSplit(rule: SplitRule | undefined): string {
  if (rule === undefined) return 'none: all data are coded';
  if (rule.folds !== undefined)
    return `each of ${rule.folds} contiguous blocks by ${rule.by} in turn, trained on the others`;
  const order = rule.order === 'in_time' ? 'the first' : 'a random';
  const share = `${Number((rule.train * 100).toPrecision(6))} %`;
  const tail = rule.order === 'random' ? `, seed ${rule.seed ?? 1}` : '';
  return `${order} ${share} by ${rule.by}${tail}`;
}
