import { type Command, InvalidArgumentError } from 'commander';
import { BitassayError, type InputError } from '../../errors/errors.ts';
import { USUAL_CONTENT_LIMIT_BYTES, unpackContainer } from '../../harness/container.ts';
import { countText } from '../../report/figures.ts';
import { checkWritable, readFileWhole, STANDARD_STREAM, writeFileWhole } from '../output.ts';

interface DecodeOptions {
  readonly output: string;
  readonly limit: number;
  readonly force?: boolean;
}

const EXAMPLES = `
Examples:
  bitassay decode events.basy -o events.log
  bitassay decode events.basy -o - | tail -n 3
  bitassay decode unknown.basy -o unknown.bin --limit 1000000

A file that was cut, altered or lengthened is refused, and nothing is written.`;

function parseByteCount(text: string): number {
  const value = Number(text);
  if (!/^\d+$/.test(text) || !Number.isSafeInteger(value)) {
    throw new InvalidArgumentError('A whole number of bytes is expected.');
  }
  return value;
}

/** Adds `decode`: gives back the file that `encode` coded. */
export function registerDecode(program: Command): void {
  program
    .command('decode')
    .summary('give back a file that encode coded')
    .description(
      'Decodes FILE, which bitassay encode wrote, and checks the content against its checksum. - is standard input or output.',
    )
    .argument('<file>', 'the file to decode, or -')
    .requiredOption('-o, --output <file>', 'where the content goes, or -')
    .option(
      '--limit <bytes>',
      'refuse more content than this',
      parseByteCount,
      USUAL_CONTENT_LIMIT_BYTES,
    )
    .option('--force', 'replace the result if it exists')
    .addHelpText('after', EXAMPLES)
    .action(decodeFile);
}

async function decodeFile(file: string, options: DecodeOptions): Promise<void> {
  const overwrite = options.force === true;
  checkWritable(options.output, overwrite);
  const bytes = await readFileWhole(file);
  const name = file === STANDARD_STREAM ? 'standard input' : file;
  const { content, header } = unpackNamed(name, bytes, options.limit);
  await writeFileWhole(options.output, content, overwrite);
  process.stderr.write(
    `${name}: ${countText(content.length)} bytes (${header.candidate}); the checksum agrees\n`,
  );
}

/** What is wrong with a container is said with the name of its file. */
function unpackNamed(name: string, bytes: Uint8Array, limit: number) {
  try {
    return unpackContainer(bytes, limit);
  } catch (error) {
    if (!(error instanceof BitassayError)) throw error;
    const SameKind = error.constructor as new (
      ...parts: ConstructorParameters<typeof InputError>
    ) => BitassayError;
    throw new SameKind(error.message, { ...error.where, file: name }, error);
  }
}
