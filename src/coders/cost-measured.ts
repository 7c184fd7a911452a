import type { Lengths } from './contract.ts';
import type { BothEnds, EndCost } from './cost.ts';

/**
 * Code and RAM of exported forms, measured once: the C99 that `export` writes, built with gcc 12 -Os for x86-64; code as `size` tells
 * it, RAM as `-fstack-usage`: the frames of all functions together, in one of which the whole state lies. Tests build the
 * exports anew and hold them to these figures. A smaller device's code differs; its own figures can be put in their place.
 */
type MeasuredForm = BothEnds<Readonly<Record<Lengths, EndCost>>>;

const size = (codeBytes: number, ramBytes: number): EndCost => ({
  flashBytes: 0,
  ramBytes,
  codeBytes,
});

/** Coders with tables of one shape, whatever is in them. */
export const MEASURED = {
  huffman: {
    encoder: { link: size(343, 64), sent: size(343, 64), known: size(232, 64) },
    decoder: { link: size(565, 120), sent: size(540, 112), known: size(353, 96) },
  },
  /** Of one symbol, where none is left over. */
  blocksOfOne: {
    encoder: { link: size(558, 80), sent: size(558, 80), known: size(446, 72) },
    decoder: { link: size(672, 112), sent: size(641, 104), known: size(482, 104) },
  },
  /** Between blocks of two and of three symbols, and words of few lengths and many. */
  blocks: {
    encoder: { link: size(570, 80), sent: size(570, 80), known: size(468, 80) },
    decoder: { link: size(770, 120), sent: size(760, 112), known: size(590, 104) },
  },
  rice: {
    encoder: { link: size(350, 64), sent: size(350, 64), known: size(241, 64) },
    decoder: { link: size(513, 96), sent: size(494, 88), known: size(288, 72) },
  },
  golomb: {
    encoder: { link: size(373, 72), sent: size(373, 72), known: size(266, 72) },
    decoder: { link: size(540, 104), sent: size(513, 96), known: size(315, 80) },
  },
  'exp-golomb': {
    encoder: { link: size(460, 80), sent: size(460, 80), known: size(346, 80) },
    decoder: { link: size(528, 96), sent: size(508, 88), known: size(306, 72) },
  },
  staticEscape: {
    encoder: { link: size(1007, 184), sent: size(1062, 184), known: size(922, 168) },
    decoder: { link: size(1295, 176), sent: size(1304, 176), known: size(1006, 168) },
  },
  staticAdded: {
    encoder: { link: size(1193, 192), sent: size(1240, 192), known: size(1070, 176) },
    decoder: { link: size(1474, 192), sent: size(1490, 192), known: size(1192, 176) },
  },
  /** Without the arrays of a record's parts, which {@link FIELDS_EXTRAS} counts. */
  fields: {
    encoder: { link: size(1364, 192), sent: size(1417, 192), known: size(1299, 192) },
    decoder: { link: size(1582, 200), sent: size(1594, 200), known: size(1368, 192) },
  },
} as const satisfies Readonly<Record<string, MeasuredForm>>;

/** What more `fields` takes where a plan needs it. */
export const FIELDS_EXTRAS = {
  classes: { encoder: size(112, 8), decoder: size(95, 0) },
  beside: { encoder: size(38, 0), decoder: size(54, 0) },
  reversed: { encoder: size(27, 0), decoder: size(18, 0) },
  delta2: { encoder: size(56, 0), decoder: size(58, 0) },
  linear: { encoder: size(492, 48), decoder: size(403, 8) },
  wide: { encoder: size(274, 16), decoder: size(238, 16) },
} as const satisfies Readonly<Record<string, BothEnds<EndCost>>>;

/** Costs of a measured form with tables of so many bytes at each end. */
export function measuredCosts(
  form: MeasuredForm,
  lengths: Lengths,
  flashBytes: BothEnds<number>,
): BothEnds<EndCost> {
  return {
    encoder: { ...form.encoder[lengths], flashBytes: flashBytes.encoder },
    decoder: { ...form.decoder[lengths], flashBytes: flashBytes.decoder },
  };
}
