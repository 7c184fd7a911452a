/** `npm run docs`: writes the documents that are made from the code, so that they cannot fall behind it. */
import { writeFileSync } from 'node:fs';
import { ensure, main } from './ensure.mjs';

await main(async () => {
  ensure();
  // Built just now, so the compiler cannot know it.
  const built = new URL('../dist/cli/documents.js', import.meta.url);
  const { documents } = await import(built.href);
  for (const [name, text] of documents()) {
    writeFileSync(new URL(`../docs/${name}`, import.meta.url), text);
    console.log(`docs/${name}`);
  }
  return 0;
});
