import { describe, expect, test } from 'vitest';
import { parsePlan } from '../../src/corpus/plan.ts';
import { InputError } from '../../src/errors/errors.ts';
import { requestOf } from '../../src/harness/plan-request.ts';

const PLAN = `plan: 1
corpora:
  alerts: {files: alerts.ndjson, symbols: bytes, messages: lines}
  words: {files: alerts.ndjson, symbols: u16le, messages: whole}
candidates: [fixed]
`;

function requestWith(timing: string) {
  return requestOf(parsePlan(`${PLAN}timing: ${timing}\n`, 'corpora-demo/plan.yaml'));
}

describe('timing in a plan', () => {
  test('asks for samples and a pacer', async () => {
    expect((await requestWith('{repeats: 3}')).timing).toEqual({
      repeats: 3,
      pacer: 'deflate-huffman',
    });
    expect((await requestWith('{pacer: "deflate:level=1"}')).timing).toEqual({
      repeats: 20,
      pacer: 'deflate:level=1',
    });
  });

  test('of 0 samples asks for no times, whatever the pacer', async () => {
    expect((await requestWith('{repeats: 0}')).timing).toBeUndefined();
    expect((await requestWith('{repeats: 0, pacer: huffman}')).timing).toBeUndefined();
  });

  test.each([
    ['{pacer: huffman}', /huffman cannot be the pacer, since it needs tables/],
    ['{pacer: deflat}', /there is no coder named "deflat"/],
  ])('%s is refused at its line', async (timing, message) => {
    const error: unknown = await requestWith(timing).catch((thrown: unknown) => thrown);
    expect(error).toBeInstanceOf(InputError);
    expect((error as InputError).message).toMatch(message);
    expect((error as InputError).where).toMatchObject({
      file: 'corpora-demo/plan.yaml',
      line: 6,
      key: 'timing.pacer',
    });
  });
});
