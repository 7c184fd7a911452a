import { type Command, Option } from 'commander';
import { InputError } from '../errors/errors.ts';
import { STANDARD_STREAM, writeFileWhole, writeStandardOutput } from './output.ts';

/** Where a result goes, and in which format. */
export interface OutputOptions {
  readonly to?: 'text' | 'json';
  readonly json?: boolean;
  readonly output?: string;
  readonly force?: boolean;
}

export function addOutputOptions(command: Command): Command {
  return command
    .addOption(new Option('--to <format>', 'format of the result').choices(['text', 'json']))
    .option('--json', 'the same as --to json')
    .option('-o, --output <file>', 'write the result to a file')
    .option('--force', 'replace that file if it exists');
}

/** Writes a result as JSON or as a screen, to standard output or a file. */
export async function writeResult(
  json: unknown,
  options: OutputOptions,
  screen: () => string,
): Promise<void> {
  if (options.json && options.to === 'text') {
    throw new InputError('--json and --to text contradict each other', {
      advice: 'Give one of them.',
    });
  }
  const asJson = options.json === true || options.to === 'json';
  const text = asJson ? `${JSON.stringify(json, null, 1)}\n` : screen();
  if (options.output === undefined || options.output === STANDARD_STREAM)
    await writeStandardOutput(text);
  else await writeFileWhole(options.output, text, options.force);
}
