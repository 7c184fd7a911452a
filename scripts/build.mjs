/** `npm run build`: always compiles, also when nothing has changed. */
import { build, ensureInstalled, main } from './ensure.mjs';

await main(() => {
  ensureInstalled();
  build();
});
