import { BugError } from '../errors/errors.ts';
import type { IntervalSink } from '../models/interval.ts';
import { PairTrainer, type PairTree, UnitPairTrainer } from '../models/pair-tree.ts';
import { compileTable, type StaticTable } from '../models/static-table.ts';
import type { AdaptiveModel } from '../models/symbol-model.ts';
import type { ArithSettings } from './arith-settings.ts';
import type { Setup, Tables, Trainer } from './contract.ts';

/** What `arith` is trained to. */
export type ArithTables =
  | {
      readonly coder: 'arith';
      readonly policy: 'shipped';
      /** Raw counts of orders 0 … k. */
      readonly pairs: PairTree;
      /** The same, quantised. */
      readonly table: StaticTable;
    }
  | { readonly coder: 'arith'; readonly policy: 'sent'; readonly pairs: PairTree }
  | { readonly coder: 'arith'; readonly policy: 'primed'; readonly model: AdaptiveModel };

/** The tables that a setup's policy needs; a missing or foreign set is our own bug. */
export function tablesFor<P extends ArithTables['policy']>(
  setup: Setup,
  policy: P,
): Extract<ArithTables, { policy: P }> {
  const tables = setup.tables as ArithTables | undefined;
  if (tables?.coder !== 'arith' || tables.policy !== policy) {
    throw new BugError(`arith was given no tables for ${policy}`, {
      got: tables === undefined ? 'none' : `tables of ${(tables as Tables).coder}`,
    });
  }
  return tables as Extract<ArithTables, { policy: P }>;
}

/** A trainer for the policies that have tables. */
export function arithTrainer(settings: ArithSettings, setup: Setup): Trainer {
  const { policy, alphabetSize } = setup;
  const { order, positions } = settings;
  if (policy === 'primed') return primedTrainer(settings, setup);
  const startAtMessages = policy === 'shipped' || setup.reset === 'message';
  const trainer =
    setup.fill === undefined
      ? new PairTrainer(alphabetSize, order, startAtMessages, positions)
      : new UnitPairTrainer(alphabetSize, order, positions);
  trainer.pairs.tree.memory.narrow(setup.modelBytes);
  return {
    push: (chunk) => trainer.push(chunk),
    finish: (): ArithTables => {
      const { pairs } = trainer;
      if (policy === 'sent') return { coder: 'arith', policy, pairs };
      const bits = settings.totalBits(alphabetSize);
      const table = compileTable(pairs.tree, order, settings.unseen, { bits });
      return { coder: 'arith', policy: 'shipped', pairs, table };
    },
  };
}

/** Training needs no code. */
const nowhere: IntervalSink = { put() {} };

/** Under `fill`, contexts begin at one of so many units of the train split, as if messages held so many. */
const UNITS_A_START = 8;

/** Runs the model over the train split without a stage. */
function primedTrainer(settings: ArithSettings, setup: Setup): Trainer {
  const model = settings.newModel(setup.alphabetSize);
  model.memory.narrow(setup.modelBytes);
  const startEvery = setup.fill === undefined ? 1 : UNITS_A_START;
  let left = startEvery;
  return {
    push(chunk) {
      let from = 0;
      for (const to of chunk.messageEnds) {
        model.encode(chunk.symbols, from, to, nowhere);
        if (--left === 0) {
          left = startEvery;
          if (setup.reset === 'message') model.startContexts();
        }
        from = to;
      }
      model.encode(chunk.symbols, from, chunk.symbols.length, nowhere);
    },
    finish: (): ArithTables => ({ coder: 'arith', policy: 'primed', model }),
  };
}

/** The adaptive model that both ends of a unit start with. */
export function adaptiveModelFor(settings: ArithSettings, setup: Setup): AdaptiveModel {
  const model =
    setup.policy === 'primed'
      ? tablesFor(setup, 'primed').model.clone()
      : settings.newModel(setup.alphabetSize);
  model.memory.narrow(setup.modelBytes);
  if (setup.reset === 'message') model.markResetState();
  model.startContexts();
  return model;
}

/** Whether contexts begin anew at each message. */
export const startsAtMessages = (setup: Setup): boolean =>
  setup.policy === 'shipped' || setup.reset === 'message';
