/**
 * Coders for tests of isolation, as a module of coders besides the registry's. Each codes bytes as they are, and misbehaves
 * as its parameter says.
 */

const grown = [];
let calls = 0;

/** @type {Record<string, () => void>} */
const deeds = {
  no: () => {},
  throw_error: () => {
    throw new TypeError('a table is missing');
  },
  throw_nothing: () => {
    throw undefined;
  },
  throw_unshowable: () => {
    throw new Proxy(
      {},
      {
        get() {
          throw new Error('nobody reads me');
        },
        getPrototypeOf() {
          throw new Error('nobody asks where I come from');
        },
      },
    );
  },
  exit: () => process.exit(7),
  hang: () => {
    for (;;) {
      // Nothing from outside gets in here.
    }
  },
  heap: () => {
    for (;;) grown.push({ value: String(grown.length) });
  },
  arrays: () => {
    // Filled: memory that is never touched is never taken.
    for (;;) grown.push(new Uint8Array(2 ** 24).fill(1));
  },
  arrays_between_steps: () => {
    grown.push(new Uint8Array(100e6).fill(1));
  },
  throw_later: () => {
    if (++calls > 1) throw new TypeError('once is enough');
  },
  stray_error: () => {
    setTimeout(() => {
      throw new Error('nobody waits for me');
    }, 0);
  },
};

/** @param {string} deed */
function misbehave(deed) {
  deeds[deed]();
}

export const coders = ['encode', 'decode'].map((place) => ({
  declaration: {
    name: `misbehaving-${place}`,
    summary: 'Bytes as they are, with a fault.',
    parameters: [
      {
        key: 'does',
        kind: 'word',
        words: [...Object.keys(deeds), 'uncloneable'],
        standard: 'no',
        meaning: 'the fault',
      },
    ],
    policies: ['none'],
    resets: ['message'],
    needsWholeMessage: false,
    reference: false,
    maxAlphabetSize: 256,
    worstCase: '8 bits a symbol',
    memory: 'none',
    source: 'made up for tests',
  },
  /** @param {{ does: string }} values */
  create: (values) => coderOf(place, values.does),
}));

/**
 * @param {string} place
 * @param {string} does
 */
function coderOf(place, does) {
  const deed = does === 'uncloneable' ? 'no' : does;
  return {
    declares: coders[place === 'encode' ? 0 : 1].declaration,
    encoder() {
      /** @type {number[]} */
      const bytes = [];
      /** @type {number[]} */
      const ends = [];
      return {
        /** @param {{ symbols: Uint8Array, messageEnds: Uint32Array }} chunk */
        push({ symbols, messageEnds }) {
          if (place === 'encode') misbehave(deed);
          bytes.push(...symbols);
          ends.push(...messageEnds);
        },
        finish: () => ({
          bytes: Uint8Array.from(bytes),
          messageEndsBits: Float64Array.from(ends, (end) => 8 * end),
          account: {
            writtenBits: 8 * bytes.length,
            endingBits: 0,
            paddingBits: 0,
            tableBits: 0,
            indexBits: 0,
            framingBits: 0,
            checkBits: 0,
          },
          payloadBits: 8 * bytes.length,
        }),
      };
    },
    decoder: () => ({
      /** @param {{ bytes: Uint8Array, symbolCounts: Uint32Array }} input */
      decode({ bytes, symbolCounts }) {
        if (place === 'decode') misbehave(deed);
        let end = 0;
        const messageEnds = Uint32Array.from(symbolCounts, (count) => {
          end += count;
          return end;
        });
        return {
          sequence: { alphabetSize: 256, symbols: bytes.slice(0, end), messageEnds },
          bitsConsumed: 8 * end,
        };
      },
    }),
    ...(does === 'uncloneable'
      ? {
          /** @param {{ messageEnds: Uint32Array }} sequence */
          price: ({ messageEnds }) => ({
            idealBits: 0,
            messageIdealBits: new Float64Array(messageEnds.length),
            perField: [{ name: () => 'a function', idealBits: 0, choice: '' }],
          }),
        }
      : {}),
  };
}
