import { Command } from 'commander';
import { toolVersion } from '../harness/environment.ts';
import { registerAdopt } from './commands/adopt.ts';
import { registerCache } from './commands/cache.ts';
import { registerCalibrate } from './commands/calibrate.ts';
import { registerChoose } from './commands/choose.ts';
import { registerCoders } from './commands/coders.ts';
import { registerDecode } from './commands/decode.ts';
import { registerEncode } from './commands/encode.ts';
import { registerEntropy } from './commands/entropy.ts';
import { registerExport } from './commands/export.ts';
import { registerGate } from './commands/gate.ts';
import { registerHistory } from './commands/history.ts';
import { registerRun } from './commands/run.ts';
import { registerTry } from './commands/try.ts';

/** The program with all its commands; it throws instead of ending the process. */
export function buildProgram(): Command {
  const program = new Command('bitassay')
    .description(
      'Choose, prove and keep proving the entropy coder of a product, on in-house data.\n' +
        'Rates are bits per symbol with everything counted, and each decode is compared with its input.',
    )
    .version(toolVersion(), '-V, --version')
    .showHelpAfterError('(bitassay COMMAND --help shows what a command takes)')
    .showSuggestionAfterError()
    .exitOverride();
  const register = [
    registerTry,
    registerRun,
    registerEntropy,
    registerCalibrate,
    registerCoders,
    registerEncode,
    registerDecode,
    registerChoose,
    registerExport,
    registerAdopt,
    registerGate,
    registerHistory,
    registerCache,
  ];
  for (const add of register) add(program);
  for (const command of program.commands)
    command
      .exitOverride()
      .showHelpAfterError(`(bitassay ${command.name()} --help shows what it takes)`);
  return program.addHelpText(
    'after',
    `
Start here:
  bitassay try FILE                      which coder, how far from the floor, where the bits went
  bitassay try FILE --messages lines     the same, line by line
  bitassay run PLAN.yaml                 the product's own framing and table policies

Exit codes: 0 done, 1 the answer is no, 2 bad use or input, 3 a cell failed, 4 the environment, 70 a bug of bitassay, 130 interrupted.`,
  );
}
