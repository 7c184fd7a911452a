import { InputError } from '../errors/errors.ts';
import { parseSymbolTaker } from '../symbols/takers/registry.ts';
import type { CorpusSpec, RawCorpus } from './corpus.ts';
import { everyEnds, type MessageRule, parseMessageRule } from './messages.ts';

/** What of a corpus says how it can be cut again. */
export type CutSpec = Pick<CorpusSpec, 'name' | 'record' | 'symbols' | 'messages' | 'lengths'>;

/** Symbols that one record gives; undefined where that is no fixed number. */
function symbolsPerRecord(spec: CutSpec): number | undefined {
  const taker = parseSymbolTaker(spec.symbols);
  if (taker.field !== undefined) return 1;
  if (taker.alphabet !== 'natural' || spec.record === undefined) return undefined;
  return spec.record.bytes * taker.maxSymbolsPerByte;
}

/** Symbols of each message but the last of a file; undefined where the framing fixes none. */
export function symbolsPerMessage(spec: CutSpec): number | undefined {
  const rule = parseMessageRule(spec.messages);
  if (rule.kind === 'every') return rule.count;
  if (rule.kind !== 'records') return undefined;
  const perRecord = symbolsPerRecord(spec);
  return perRecord === undefined ? undefined : rule.count * perRecord;
}

function refuse(spec: CutSpec, count: number, expected: string, advice: string): never {
  throw new InputError(
    `the corpus ${spec.name} cannot be cut into messages of ${count} symbols each`,
    { key: 'message_symbols', expected, got: `messages: ${spec.messages}`, advice },
  );
}

/**
 * The framing, as a plan would write it, that cuts a corpus into messages of `count` symbols instead of its own.
 * @throws InputError where its messages end at lines, frames or a coded budget, so that no count of symbols can cut them,
 *   and where they are records and `count` is no whole number of them
 */
export function messagesOfSymbols(spec: CutSpec, count: number): string {
  const rule: MessageRule = parseMessageRule(spec.messages);
  if (rule.kind === 'whole' || rule.kind === 'every') return `every=${count}`;
  if (rule.kind !== 'records') {
    refuse(
      spec,
      count,
      'messages: whole, every=N or records=K',
      'Give this corpus a plan of its own, without vary.message_symbols.',
    );
  }
  const perRecord = symbolsPerRecord(spec);
  if (perRecord === undefined) {
    refuse(
      spec,
      count,
      `symbols of which each record holds a fixed number, not ${spec.symbols}`,
      'Use messages: every=N.',
    );
  }
  if (count % perRecord !== 0) {
    const next = Math.ceil(count / perRecord) * perRecord;
    refuse(
      spec,
      count,
      `a multiple of ${perRecord}, the symbols of one record`,
      `Use ${next}, or messages: every=N, which may cut a record.`,
    );
  }
  return `records=${count / perRecord}`;
}

/**
 * The same values in messages of `count` symbols, as if the plan had said so: nothing is read again, values are shared.
 * @throws as {@link messagesOfSymbols}
 */
export function recutRaw(raw: RawCorpus, spec: CutSpec, count: number): RawCorpus {
  const messagesAs = messagesOfSymbols(spec, count);
  const ends = raw.files.map((file) => everyEnds(file.symbolCount, count));
  const total = ends.reduce((sum, own) => sum + own.length, 0);
  const messageEnds = new Uint32Array(total);
  const fileEnds = new Uint32Array(ends.length);
  let at = 0;
  let base = 0;
  ends.forEach((own, file) => {
    for (const end of own) messageEnds[at++] = base + end;
    fileEnds[file] = at;
    base += raw.files[file].symbolCount;
  });
  return {
    ...raw,
    files: raw.files.map((file, i) => ({ ...file, messageCount: ends[i].length })),
    messagesAs,
    // A link carries what is cut by count, whatever carried the whole.
    lengths: spec.lengths ?? 'link',
    messageEnds,
    fileEnds,
  };
}
