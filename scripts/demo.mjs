/** `npm run demo`: the demo plan through the built program, also on a bare clone. Further options are passed on. */
import { ensure, main, runNode } from './ensure.mjs';

await main(() => {
  ensure();
  return runNode([
    'dist/cli/main.js',
    'run',
    'corpora-demo/plan.yaml',
    '-o',
    'corpora-demo/plan.run',
    ...process.argv.slice(2),
  ]);
});
