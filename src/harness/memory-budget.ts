import { megabytesText } from '../corpus/byte-size.ts';
import type { CorpusSpec } from '../corpus/corpus.ts';
import { countMessages } from '../corpus/count-messages.ts';
import { findFiles } from '../corpus/find-files.ts';
import { USUAL_INTAKE_LIMITS } from '../corpus/intake.ts';
import { inputFileBytes } from '../corpus/read-file.ts';
import type { SampleRule } from '../corpus/sample-rule.ts';
import { whyNotStreamed } from '../corpus/stream-source.ts';
import { InputError } from '../errors/errors.ts';
import { parseSymbolTaker } from '../symbols/takers/registry.ts';

/** What the process holds beside data and models: the program, buffers for chunks, and what is not collected yet. */
const PROGRAM_BYTES = 150e6;
/** Of the rest, what a growing model may take: old arrays linger until they are collected. */
const MODEL_SHARE = 0.6;
/** Held for each message while cells run: its end, its bits, and copies while lists grow and are sorted. */
const BYTES_A_MESSAGE = 120;
/** Held for each symbol where data are taken as a whole: source, symbols, both coded and decoded, contexts sorted. */
const WHOLE_BYTES_A_SYMBOL = 32;
/** Held for each message there. */
const WHOLE_BYTES_A_MESSAGE = 160;
/** What a message of a sample is taken to have. */
const SAMPLED_MESSAGE_BYTES = 32;

/** What reading in pieces may take. */
export interface StreamingLimits {
  readonly modelBytes: number;
  readonly maxMessages: number;
}

/** @param memoryBytes  what the process may hold, not below the least there is */
export function streamingLimits(memoryBytes: number): StreamingLimits {
  const rest = memoryBytes - PROGRAM_BYTES;
  return {
    modelBytes: Math.floor(rest * MODEL_SHARE),
    maxMessages: Math.floor((rest * (1 - MODEL_SHARE)) / BYTES_A_MESSAGE),
  };
}

/**
 * Whether a corpus can be taken as a whole within the memory, by the size of its files and the number of its messages.
 * @throws InputError where it cannot, and cannot be read in pieces either; as intake does for files
 */
export async function fitsMemory(
  spec: CorpusSpec,
  baseFolder: string,
  memoryBytes: number,
): Promise<boolean> {
  const found = await findFiles(spec.files, baseFolder);
  const sizes: number[] = [];
  for (const { absolutePath, path } of found) sizes.push(await inputFileBytes(absolutePath, path));
  let bytes = sizes.reduce((a, b) => a + b, 0);
  if (spec.sample !== undefined) bytes = Math.min(bytes, sampleBytes(spec.sample, bytes));
  const { maxSymbolsPerByte } = parseSymbolTaker(spec.symbols);
  let needed = PROGRAM_BYTES + bytes + bytes * maxSymbolsPerByte * WHOLE_BYTES_A_SYMBOL;
  if (needed <= memoryBytes) {
    // Of a sample nothing is read but its blocks.
    const messages =
      spec.sample === undefined
        ? found.reduce((sum, f, i) => sum + countMessages(f, sizes[i], maxSymbolsPerByte, spec), 0)
        : bytes / SAMPLED_MESSAGE_BYTES;
    needed += messages * WHOLE_BYTES_A_MESSAGE;
  }
  if (needed <= memoryBytes && bytes <= USUAL_INTAKE_LIMITS.maxBytes) return true;
  const refusal = spec.sample === undefined ? whyNotStreamed(spec) : 'a sample is taken as a whole';
  if (refusal === undefined) return false;
  throw new InputError(`the corpus ${spec.name} does not fit the memory allowed: ${refusal}`, {
    key: 'memory',
    expected: `at least ${megabytesText(needed)} for ${bytes} bytes taken as a whole`,
    got: megabytesText(memoryBytes),
    advice:
      spec.sample === undefined
        ? 'Allow more memory, or take a sample.'
        : 'Allow more memory, or take fewer blocks.',
  });
}

/** About what a sample of so many bytes holds. */
function sampleBytes(sample: SampleRule, ofBytes: number): number {
  if (sample.kind === 'reservoir') return sample.bytes;
  const { every, blockBytes } = sample;
  return Math.ceil(ofBytes / blockBytes / every) * blockBytes;
}
