import { readFileSync } from 'node:fs';
import { describe, expect, it } from 'vitest';
import { documents } from '../../src/cli/documents.ts';

describe('documents made from the code', () => {
  it.each([...documents()])(
    'docs/%s says what the code says (else: npm run docs)',
    (name, text) => {
      expect(readFileSync(new URL(`../../docs/${name}`, import.meta.url), 'utf8')).toBe(text);
    },
  );
});
