import type { Command } from 'commander';
import { Option } from 'commander';
import { byteSizeText } from '../corpus/byte-size.ts';
import type { CorpusSpec } from '../corpus/corpus.ts';
import { type SampleRule, sampleRuleText } from '../corpus/sample-rule.ts';
import { InputError } from '../errors/errors.ts';
import { checkFieldsApart, parseRecordField, type RecordField } from '../symbols/record.ts';

/** Options that say how files become symbols and messages; the same for every command that reads files without a plan. */
export interface SourceOptions {
  readonly symbols: string;
  readonly messages: string;
  readonly lengths?: 'known' | 'link' | 'sent';
  readonly record?: number;
  readonly field: readonly string[];
  readonly step?: number;
  readonly alphabet?: number;
  readonly sample?: SampleRule;
}

const collect = (value: string, before: string[]): string[] => [...before, value];

/** A reader of whole or real numbers for commander, whose own message names the option. */
export function numberOption(least: number, whole: boolean): (text: string) => number {
  return (text) => {
    const value = Number(text);
    if (
      text.trim() === '' ||
      !Number.isFinite(value) ||
      value < least ||
      (whole && !Number.isInteger(value))
    ) {
      throw new InputError(`cannot use ${JSON.stringify(text)} as a number here`, {
        expected: `${whole ? 'a whole number' : 'a number'} of ${least} or more`,
        got: text,
      });
    }
    return value;
  };
}

export function addSourceOptions(command: Command): Command {
  return command
    .option(
      '--symbols <how>',
      'bytes, bits, nibbles, u16le, s16be …, codepoints, csv:COLUMN, field:NAME',
      'bytes',
    )
    .option(
      '--messages <how>',
      'whole, lines, every=N, records=K, prefix=u16be, fill=BYTES,unit=N|line|row',
      'whole',
    )
    .addOption(
      new Option('--lengths <rule>', 'what the decoder is told of lengths for free').choices([
        'known',
        'link',
        'sent',
      ]),
    )
    .option('--record <bytes>', 'size of a fixed record, in bytes', numberOption(1, true))
    .option('--field <name=type@offset>', 'a field of the record; may be repeated', collect, [])
    .option(
      '--step <size>',
      'quantisation step of a numeric column',
      numberOption(Number.MIN_VALUE, false),
    )
    .option('--alphabet <size>', 'alphabet size, in place of the usual one', numberOption(1, true));
}

/** The corpus that files and options describe. */
export function specFromOptions(
  name: string,
  files: readonly string[],
  options: SourceOptions,
): CorpusSpec {
  const { record, field, lengths, step, alphabet } = options;
  if (record === undefined && field.length > 0) {
    throw new InputError('--field needs --record, the size of a record in bytes');
  }
  const fields: RecordField[] = field.map((text) => {
    const at = text.indexOf('=');
    if (at < 1)
      throw new InputError(`cannot read --field ${text}`, {
        expected: 'name=type@offset, as in dt=u16le@0',
      });
    return parseRecordField(text.slice(0, at), text.slice(at + 1), record!);
  });
  checkFieldsApart(fields);
  return {
    name,
    files,
    symbols: options.symbols,
    messages: options.messages,
    ...(record === undefined ? {} : { record: { bytes: record, fields } }),
    ...(lengths === undefined ? {} : { lengths }),
    ...(step === undefined ? {} : { step }),
    ...(alphabet === undefined ? {} : { alphabet }),
    ...(options.sample === undefined ? {} : { sample: options.sample }),
  };
}

/** The options as they were typed, where they differ from the usual ones: for the command that a screen proposes. */
export function typedOptions(
  options: SourceOptions & { readonly memory?: number },
  messages?: string,
): string {
  const parts: string[] = [];
  if (options.symbols !== 'bytes') parts.push(`--symbols ${options.symbols}`);
  const rule = messages ?? (options.messages === 'whole' ? undefined : options.messages);
  if (rule !== undefined) parts.push(`--messages ${rule}`);
  if (options.sample !== undefined) parts.push(`--sample ${sampleRuleText(options.sample)}`);
  if (options.memory !== undefined) parts.push(`--memory ${byteSizeText(options.memory)}`);
  return parts.length === 0 ? '' : ` ${parts.join(' ')}`;
}
