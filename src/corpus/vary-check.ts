import { InputError } from '../errors/errors.ts';
import type { CorpusSpec } from './corpus.ts';
import type { PlanDocument } from './plan-document.ts';
import { type Fault, gotText, keyText } from './plan-faults.ts';
import type { PlanFile } from './plan-schema.ts';
import { messagesOfSymbols } from './recut.ts';

/** Keys whose types were not checked. */
type Written = { readonly [K in keyof PlanFile]?: Record<string, unknown> | undefined };

/**
 * What is wrong with `vary` and `split.folds` beyond the types of their values, which the schema holds.
 * @param specs  corpora that are sound in themselves
 */
export function varyFaults(document: PlanDocument, specs: readonly CorpusSpec[]): Fault[] {
  if (typeof document.data !== 'object' || document.data === null) return [];
  const { split, vary } = document.data as Written;
  return [
    ...listFaults(document, vary),
    ...messageFaults(document, vary, specs),
    ...trainingFaults(document, vary, split),
    ...foldFaults(document, split),
  ];
}

function itemsOf(vary: Written['vary'], key: string): unknown[] {
  const items = vary?.[key];
  return Array.isArray(items) ? items : [];
}

function listFaults(document: PlanDocument, vary: Written['vary']): Fault[] {
  return ['train_share', 'message_symbols', 'align'].flatMap((key) => {
    const items = itemsOf(vary, key);
    return items.flatMap((item, i): Fault[] => {
      if (items.indexOf(item) === i) return [];
      const path = ['vary', key, i];
      return [
        {
          line: document.lineOf(path),
          key: keyText(path),
          problem: 'listed twice',
          got: gotText(item),
        },
      ];
    });
  });
}

function messageFaults(
  document: PlanDocument,
  vary: Written['vary'],
  specs: readonly CorpusSpec[],
): Fault[] {
  const faults: Fault[] = [];
  for (const spec of specs) {
    itemsOf(vary, 'message_symbols').forEach((count, i) => {
      if (typeof count !== 'number' || !Number.isInteger(count) || count < 1) return;
      try {
        messagesOfSymbols(spec, count);
      } catch (error) {
        // Messages that cannot be read have a fault of their own.
        if (!(error instanceof InputError) || error.where.key !== 'message_symbols') return;
        const path = ['vary', 'message_symbols', i];
        const { expected = '', got = '', advice = '' } = error.where;
        const place = { line: document.lineOf(path), key: keyText(path) };
        faults.push({ ...place, problem: error.message, expected, got, advice });
      }
    });
  }
  return faults;
}

/** Nothing is trained unless the plan asks for shipped or primed tables, which it does where it names none. */
function trainingFaults(
  document: PlanDocument,
  vary: Written['vary'],
  split: Written['split'],
): Fault[] {
  const { tables } = document.data as { tables?: unknown };
  if (!Array.isArray(tables) || tables.includes('shipped') || tables.includes('primed')) return [];
  const needing: string[][] = [];
  if (vary?.['train_share'] !== undefined) needing.push(['vary', 'train_share']);
  if (split?.['folds'] !== undefined) needing.push(['split', 'folds']);
  return needing.map((path) => ({
    line: document.lineOf(path),
    key: keyText(path),
    problem: 'changes nothing where nothing is trained',
    expected: 'shipped or primed among tables',
    got: `tables: ${gotText(tables)}`,
  }));
}

function foldFaults(document: PlanDocument, split: Written['split']): Fault[] {
  if (split?.['folds'] === undefined) return [];
  const faults: Fault[] = [];
  const fault = (key: string, problem: string, expected: string): void => {
    const path = ['split', key];
    const got = `${key}: ${gotText(split[key])}`;
    faults.push({ line: document.lineOf(path), key: keyText(path), problem, expected, got });
  };
  if (split['train'] !== undefined) {
    fault(
      'train',
      'changes nothing beside folds',
      'no train: each block is tested with tables trained on all others',
    );
  }
  if (split['order'] === 'random')
    fault('order', 'folds are contiguous blocks', 'order: in_time, or no order');
  return faults;
}
