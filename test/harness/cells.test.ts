import { describe, expect, it } from 'vitest';
import { parseCandidates } from '../../src/coders/candidate.ts';
import { InputError } from '../../src/errors/errors.ts';
import { decodesAlone, listCells, unitResetOf } from '../../src/harness/cells.ts';

const candidates = (...texts: string[]) => texts.flatMap(parseCandidates);

describe('cells', () => {
  it('are candidate × corpus × tables × reset, one for tables that never reset', () => {
    const { cells, undeclared } = listCells(
      ['a', 'b'],
      candidates('fixed', 'huffman', 'arith:order=1'),
      ['shipped', 'sent', 'learned'],
      ['message', 'never'],
    );
    const own = cells.filter((cell) => cell.corpus === 'a').map((cell) => cell.id);
    expect(own).toEqual([
      'a/fixed@none/message',
      'a/huffman@shipped/message',
      'a/huffman@sent/message',
      'a/huffman@sent/never',
      'a/arith:order=1@shipped/message',
      'a/arith:order=1@sent/message',
      'a/arith:order=1@sent/never',
      'a/arith:order=1@learned/message',
      'a/arith:order=1@learned/never',
    ]);
    expect(cells).toHaveLength(2 * own.length);
    // Learned Huffman at two resets, on two corpora.
    expect(undeclared).toBe(4);
  });

  it('know which messages decode alone, and reset `file` is a unit a file', () => {
    const { cells } = listCells(
      ['a'],
      candidates('arith:order=1'),
      ['shipped', 'learned'],
      ['message', 'file', 'never'],
    );
    expect(
      cells.map((cell) => [cell.policy, cell.reset, decodesAlone(cell), unitResetOf(cell)]),
    ).toEqual([
      ['shipped', 'message', true, 'message'],
      ['learned', 'message', true, 'message'],
      ['learned', 'file', false, 'never'],
      ['learned', 'never', false, 'never'],
    ]);
  });

  it('of a coder of records stand where there are records, if anywhere there are', () => {
    const list = (records: ReadonlySet<string>) =>
      listCells(['a', 'b'], candidates('fields:auto'), ['shipped'], ['message'], { records }).cells;
    expect(list(new Set(['b'])).map((cell) => cell.corpus)).toEqual(['b']);
    // Without any, the cells stand and say what they lack.
    expect(list(new Set()).map((cell) => cell.corpus)).toEqual(['a', 'b']);
  });

  it('refuse a candidate that has none, and one listed twice', () => {
    expect(() => listCells(['a'], candidates('huffman'), ['learned'], ['message'])).toThrow(
      InputError,
    );
    expect(() => listCells(['a'], candidates('huffman', 'huffman'), ['sent'], ['message'])).toThrow(
      /twice/,
    );
  });
});
