import { pathToFileURL } from 'node:url';
import type { Answer, TaskRunner } from './prove.ts';

interface ExportedModule {
  encode(message: ArrayLike<number>): Uint8Array;
  decode(bytes: Uint8Array, capacity: number): { symbols: ArrayLike<number>; usedBytes: number };
}

/** Runs an exported module, compiled or without its types, from a file. */
export async function loadModule(file: string): Promise<TaskRunner> {
  const module = (await import(pathToFileURL(file).href)) as ExportedModule;
  return (tasks) =>
    tasks.map((task): Answer => {
      try {
        if (task.kind === 'encode') {
          const bytes = module.encode(task.symbols);
          return { status: 0, elements: bytes, usedBytes: bytes.length };
        }
        const { symbols, usedBytes } = module.decode(task.bytes, task.capacity);
        return { status: 0, elements: symbols, usedBytes };
      } catch (error) {
        if (!(error instanceof RangeError)) throw error;
        return { status: 1, elements: [], usedBytes: 0 };
      }
    });
}
