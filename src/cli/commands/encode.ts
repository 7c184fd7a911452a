import { type Command, InvalidArgumentError } from 'commander';
import { parseCandidate } from '../../coders/candidate.ts';
import type { TablePolicy } from '../../coders/contract.ts';
import { BugError, InputError } from '../../errors/errors.ts';
import {
  type PackedContainer,
  packContainer,
  unpackContainer,
  usualPolicy,
} from '../../harness/container.ts';
import { countText, rateText, symbolNoun } from '../../report/figures.ts';
import { checkWritable, readFileWhole, STANDARD_STREAM, writeFileWhole } from '../output.ts';

interface EncodeOptions {
  readonly output: string;
  readonly coder: string;
  readonly symbols: string;
  readonly tables?: TablePolicy;
  readonly force?: boolean;
}

const EXAMPLES = `
Examples:
  bitassay encode events.log -o events.basy --coder huffman
  bitassay encode samples.bin -o samples.basy --coder arith:order=1 --symbols s16le
  bitassay encode - -o - --coder deflate < alerts.ndjson > alerts.basy

The result is decoded and compared before it is put in its place; a file is written whole or not at all.
Its length tells something of its content, also when it is encrypted afterwards.`;

const POLICIES: readonly TablePolicy[] = ['sent', 'learned', 'shipped', 'primed'];

/** Lets `shipped` and `primed` through, so that the container can say that they come later. */
function parsePolicy(text: string): TablePolicy {
  const policy = POLICIES.find((p) => p === text);
  if (policy === undefined) throw new InvalidArgumentError('It is sent or learned.');
  return policy;
}

/** Adds `encode`: one file, one candidate, one container. */
export function registerEncode(program: Command): void {
  program
    .command('encode')
    .summary('code one file with one candidate')
    .description(
      'Codes FILE with one candidate into a file that says everything its decoder must know. - is standard input or output.',
    )
    .argument('<file>', 'the file to code, or -')
    .requiredOption('-o, --output <file>', 'where the result goes, or -')
    .requiredOption('--coder <candidate>', 'the candidate, such as huffman or arith:order=2')
    .option('--symbols <symbols>', 'how symbols are taken from the file', 'bytes')
    .option(
      '--tables <policy>',
      'how the decoder gets its tables: sent or learned (default: learned where the coder can)',
      parsePolicy,
    )
    .option('--force', 'replace the result if it exists')
    .addHelpText('after', EXAMPLES)
    .action(encodeFile);
}

async function encodeFile(file: string, options: EncodeOptions): Promise<void> {
  const candidate = parseCandidate(options.coder);
  const policy = options.tables ?? usualPolicy(candidate);
  const overwrite = options.force === true;
  checkWritable(options.output, overwrite);
  if (options.output === STANDARD_STREAM && process.stdout.isTTY === true) {
    throw new InputError('coded bytes are not for a terminal', {
      advice: 'Name a file after -o, or send the output on with > or |.',
    });
  }
  const content = await readFileWhole(file);
  const name = file === STANDARD_STREAM ? 'standard input' : file;
  const packed = packContainer({
    candidate,
    policy,
    symbolsAs: options.symbols,
    content,
    file: name,
  });
  verify(packed, content);
  await writeFileWhole(options.output, packed.bytes, overwrite);
  process.stderr.write(`${summaryOf(name, packed)}\n`);
}

/** A container is written only if it gives back the file, bit for bit. */
function verify(packed: PackedContainer, content: Uint8Array): void {
  let restored: Uint8Array;
  try {
    restored = unpackContainer(packed.bytes, content.length).content;
  } catch (error) {
    throw new BugError(
      'what was just coded cannot be decoded; no file was written',
      { coder: packed.header.candidate, got: error instanceof Error ? error.message : '' },
      error,
    );
  }
  if (Buffer.compare(restored, content) !== 0) {
    throw new BugError('what was just coded decodes to something else; no file was written', {
      coder: packed.header.candidate,
    });
  }
}

function summaryOf(name: string, packed: PackedContainer): string {
  const { header, headerBytes, symbolCount, bytes } = packed;
  const noun = symbolNoun(header.symbolsAs);
  const rate =
    symbolCount === 0 ? '' : `, ${rateText((8 * header.codedBytes) / symbolCount)} bits/${noun}`;
  const tables = header.policy === 'none' ? '' : `, ${header.policy}`;
  return (
    `${name}: ${countText(symbolCount)} symbols${rate} (${header.candidate}${tables}); ` +
    `${countText(header.contentBytes)} bytes became ${countText(bytes.length)}, ` +
    `header ${headerBytes}; decoded again and equal`
  );
}
