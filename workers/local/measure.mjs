// `npm run --silent measure -- FILE... [--json]`: sees to the packages and ffmpeg, then measures where the command was given.
import { spawnSync } from 'node:child_process';
import { isAbsolute, join, resolve } from 'node:path';
import { pathToFileURL } from 'node:url';
import { buildKernel } from './build.mjs';
import { ensureNode, ensurePackages, ensurePrograms } from './machine.mjs';
import { root } from './places.mjs';

ensureNode();
ensurePackages();
ensurePrograms(['ffmpeg']);
buildKernel();
// npm runs scripts in the project's folder; names are meant from where the person stands.
const from = process.env.INIT_CWD ?? process.cwd();
const args = process.argv
  .slice(2)
  .map((arg) => (arg.startsWith('--') || isAbsolute(arg) ? arg : resolve(from, arg)));
const tsx = pathToFileURL(join(root, 'node_modules/tsx/dist/esm/index.mjs')).href;
const ran = spawnSync(process.execPath, ['--import', tsx, join(root, 'workers/measure-files.ts'), ...args], {
  stdio: 'inherit',
});
process.exit(ran.status ?? 1);
