import { InputError } from '../errors/errors.ts';
import type { SymbolSequence } from '../symbols/sequence.ts';
import type { Coder, Declaration, Price, Setup, Tables } from './contract.ts';
import { tableSetCosts, tableSetOperations } from './cost-table-set.ts';
import { symbolWidth } from './fixed.ts';
import { tableSetDecoder } from './table-set-decoder.ts';
import { TableSetEncoder } from './table-set-encoder.ts';
import {
  MessageStore,
  messagesWhere,
  ownersOf,
  type TableSet,
  tableSetName,
  tableSetOf,
} from './table-set-messages.ts';
import { trainTableSet } from './table-set-training.ts';

/** Most tables in a set. */
export const MOST_TABLES = 64;

/**
 * `coder` with `count` shipped tables instead of one: the candidate key `tables_in_set`. Each message takes the table that codes
 * it in the fewest bits, of equals the first. With one table the bits are those of `coder`.
 *
 * A message is a selector of ⌈log2 count⌉ bits, booked in `index`, then what the coder writes. Coders of whole bytes
 * (references) have a selector of a whole byte. A message without symbols has no selector where the decoder knows so:
 * under `known`, and under `link` where the coder writes nothing for it.
 *
 * What may surprise:
 * - the trainer needs whole messages and holds the train split, see {@link trainTableSet};
 * - the encoder holds the unit, and codes it with every table and once more;
 * - the price has no fit but for one table: several tables have no best member that could be found (DESIGN, the bit account).
 */
export function tableSet(coder: Coder, count: number): Coder {
  const declares = declarationOf(coder.declares, count);
  const { name } = declares;
  const selectorBits = declares.reference && count > 1 ? 8 : symbolWidth(count);
  const setsOf = (setup: Setup) => tableSetOf(setup, name, count);
  return {
    declares,

    check(setup) {
      if (setup.policy !== 'shipped') {
        throw new InputError('tables_in_set is for shipped tables', {
          coder: name,
          key: 'tables_in_set',
          expected: 'tables shipped',
          got: `tables ${setup.policy}`,
        });
      }
      coder.check?.(setup);
    },

    trainer(setup) {
      const store = new MessageStore(setup.alphabetSize);
      return {
        push: (chunk) => store.push(chunk),
        finish: (): TableSet => ({
          coder: tableSetName(name),
          sets: trainTableSet(coder, setup, store.finish(), count),
        }),
      };
    },

    encoder: (setup) => new TableSetEncoder(coder, setup, setsOf(setup), selectorBits),

    // The least of several that never fall never falls.
    growsSteadily: (setup) => coder.growsSteadily?.(setup) ?? false,

    costs: (setup, longestCodedBytes, sequence) =>
      tableSetCosts(coder, setup, setsOf(setup), longestCodedBytes, sequence),

    operations: (sequence, setup) => tableSetOperations(coder, sequence, setup, setsOf(setup)),

    ...(coder.decoderHolds === undefined
      ? {}
      : {
          decoderHolds(setup: Setup) {
            const holds = coder.decoderHolds!({ ...setup, tables: setsOf(setup)[0] });
            return holds === 'message' ? holds : holds + Math.ceil(selectorBits / 8);
          },
        }),

    decoder: (setup, limits) => tableSetDecoder(coder, setup, setsOf(setup), selectorBits, limits),

    ...(coder.price === undefined
      ? {}
      : {
          price: (sequence: SymbolSequence, setup: Setup) =>
            count === 1
              ? coder.price!(sequence, { ...setup, tables: setsOf(setup)[0] })
              : price(coder, sequence, setup, setsOf(setup)),
        }),

    ...(coder.describeTables === undefined
      ? {}
      : {
          describeTables: (tables, setup) =>
            setsOf({ ...setup, tables }).flatMap((own, i) => [
              `table ${i} of ${count}:`,
              ...coder.describeTables!(own, { ...setup, tables: own }),
            ]),
        }),
  };
}

function declarationOf(inner: Declaration, count: number): Declaration {
  if (!inner.policies.includes('shipped')) {
    throw new InputError(`${inner.name} has no shipped tables that could stand in a set`, {
      coder: inner.name,
      key: 'tables_in_set',
      expected: 'a coder with tables shipped',
      got: `tables ${inner.policies.join(', ')}`,
    });
  }
  return {
    ...inner,
    policies: ['shipped'],
    resets: ['message'],
    needsWholeMessage: true,
    worstCase: `${inner.worstCase}; and the selector of a table`,
    memory: `for each of ${count} tables: ${inner.memory}; encoder the unit, training the train split`,
  };
}

/** The price of each message under the table it takes; then nothing is told by field, since each table has its own choice. */
function price(
  coder: Coder,
  sequence: SymbolSequence,
  setup: Setup,
  sets: readonly Tables[],
): Price {
  const owners = ownersOf(coder, { ...setup, align: 1 }, sets, sequence);
  const messageIdealBits = new Float64Array(owners.length);
  let idealBits = 0;
  for (const [table, tables] of sets.entries()) {
    const own = messagesWhere(sequence, (i) => owners[i] === table);
    const part = coder.price!(own, { ...setup, tables });
    idealBits += part.idealBits;
    let at = 0;
    for (let i = 0; i < owners.length; i++)
      if (owners[i] === table) messageIdealBits[i] = part.messageIdealBits[at++];
  }
  return { idealBits, messageIdealBits };
}
