import type { Command } from 'commander';
import { coderEntryOf } from '../../coders/candidate.ts';
import type { Declaration } from '../../coders/contract.ts';
import { coderEntries } from '../../coders/registry.ts';
import { candidateExamples, coderListScreen, coderScreen } from '../coder-screens.ts';
import { terminalColumns } from '../output.ts';
import { addOutputOptions, type OutputOptions, writeResult } from '../output-options.ts';

const EXAMPLES = `
Examples:
  bitassay coders
  bitassay coders arith
  bitassay coders --json -o coders.json`;

/** Adds `coders`: what there is, and what one coder takes. */
export function registerCoders(program: Command): void {
  const command = program
    .command('coders')
    .summary('list the coders, or show one: parameters, policies, costs, source')
    .description('Lists the coders, or shows all that one says of itself.')
    .argument('[name]', 'the coder to show');
  addOutputOptions(command)
    .addHelpText('after', EXAMPLES)
    .action((name: string | undefined, options: OutputOptions) => showCoders(name, options));
}

async function showCoders(name: string | undefined, options: OutputOptions): Promise<void> {
  if (name === undefined) {
    const declarations = coderEntries.map(({ declaration }) => declaration);
    const json = { coders: declarations.map(jsonOf) };
    await writeResult(json, options, () => coderListScreen(declarations, terminalColumns()));
    return;
  }
  const { declaration } = coderEntryOf(name);
  await writeResult(jsonOf(declaration), options, () =>
    coderScreen(declaration, candidateExamples(declaration), terminalColumns()),
  );
}

/** Keys in files are in snake_case, and what a coder does not have is left out. */
function jsonOf(declaration: Declaration) {
  return {
    name: declaration.name,
    summary: declaration.summary,
    reference: declaration.reference,
    parameters: declaration.parameters,
    policies: declaration.policies,
    resets: declaration.resets,
    max_alphabet_size: declaration.maxAlphabetSize,
    needs_whole_message: declaration.needsWholeMessage,
    worst_case: declaration.worstCase,
    memory: declaration.memory,
    source: declaration.source,
    examples: candidateExamples(declaration),
  };
}
