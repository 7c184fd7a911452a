import { BitWriter } from '../bits/bit-writer.ts';
import { BugError } from '../errors/errors.ts';
import type { SymbolChunk } from '../symbols/sequence.ts';
import type { Coded, Coder, Encoder, Setup, Tables } from './contract.ts';
import { MessageLedger } from './message-ledger.ts';
import { writeBitsOf } from './stored-bits.ts';
import { MessageStore, messagesWhere, ownersOf, startOfMessage } from './table-set-messages.ts';

/** Gathers the unit; at its end codes it with every table, then each table's own messages once more, alone. */
export class TableSetEncoder implements Encoder {
  readonly #coder: Coder;
  readonly #setup: Setup;
  readonly #sets: readonly Tables[];
  readonly #selectorBits: number;
  readonly #store: MessageStore;

  constructor(coder: Coder, setup: Setup, sets: readonly Tables[], selectorBits: number) {
    this.#coder = coder;
    this.#setup = setup;
    this.#sets = sets;
    this.#selectorBits = selectorBits;
    this.#store = new MessageStore(setup.alphabetSize);
  }

  push(chunk: SymbolChunk): void {
    this.#store.push(chunk);
  }

  finish(): Coded {
    const messages = this.#store.finish();
    const { lengths, align } = this.#setup;
    const inner: Setup = { ...this.#setup, align: 1 };
    const owners = ownersOf(this.#coder, inner, this.#sets, messages);
    const parts = this.#sets.map((tables, table) => {
      const encoder = this.#coder.encoder({ ...inner, tables });
      encoder.push(messagesWhere(messages, (i) => owners[i] === table));
      return encoder.finish();
    });

    const writer = new BitWriter(
      parts.reduce((sum, { bytes }) => sum + bytes.length, owners.length + 64),
    );
    const ledger = new MessageLedger(align);
    const nextOf = new Uint32Array(parts.length);
    let codedBits = 0;
    for (let i = 0; i < owners.length; i++) {
      const { bytes, messageEndsBits } = parts[owners[i]];
      const at = nextOf[owners[i]]++;
      const from = at === 0 ? 0 : messageEndsBits[at - 1];
      const to = messageEndsBits[at];
      const isEmpty =
        (lengths === 'known' && messages.messageEnds[i] === startOfMessage(messages, i)) ||
        (lengths === 'link' && to === from);
      if (!isEmpty) {
        writer.writeBits(owners[i], this.#selectorBits);
        ledger.indexBits += this.#selectorBits;
      }
      writeBitsOf(writer, bytes, from, to);
      ledger.writtenBits += to - from;
      codedBits += to - from;
      ledger.close(writer);
    }
    return withAccountsOf(parts, codedBits, ledger.finish(writer));
  }
}

/** Books the coders' bits, so far all called written, on the lines where the coder itself books them. */
function withAccountsOf(parts: readonly Coded[], codedBits: number, all: Coded): Coded {
  const account = { ...all.account };
  account.writtenBits -= codedBits;
  let payloadBits = 0;
  let booked = 0;
  for (const part of parts) {
    payloadBits += part.payloadBits;
    for (const line of Object.keys(part.account) as (keyof typeof account)[]) {
      account[line] += part.account[line];
      booked += part.account[line];
    }
  }
  if (booked !== codedBits) {
    throw new BugError('the messages of all tables do not have the bits that were carried', {
      expected: `${codedBits} bits`,
      got: `${booked} bits`,
    });
  }
  return { ...all, account, payloadBits };
}
