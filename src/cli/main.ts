#!/usr/bin/env node
import { runCommand, watchProcess } from './exit.ts';
import { buildProgram } from './program.ts';

watchProcess();
process.exitCode = await runCommand(() => buildProgram().parseAsync());
