// `npm run build`: the kernel, the site, and the worker processes. Does nothing when no source changed since the last build.
import { spawnSync } from 'node:child_process';
import { createHash } from 'node:crypto';
import { existsSync, readdirSync, readFileSync, rmSync, writeFileSync } from 'node:fs';
import { join } from 'node:path';
import { root } from './places.mjs';

const sources = [
  'src',
  'workers',
  'migrations',
  'public',
  'astro.config.mjs',
  'tailwind.config.mjs',
  'tsconfig.json',
  'package-lock.json',
];
const mark = join(root, 'dist', '.built-from');

function* filesUnder(path) {
  if (!existsSync(path)) return;
  const entries = readdirSync(path, { withFileTypes: true }).sort((a, b) => (a.name < b.name ? -1 : 1));
  for (const entry of entries) {
    const inner = join(path, entry.name);
    if (entry.isDirectory()) yield* filesUnder(inner);
    // The kernel is made by the build itself.
    else if (!inner.endsWith(join('kernel', 'binary.ts'))) yield inner;
  }
}

function stateOfSources() {
  const hash = createHash('sha256').update(root).update(process.version);
  for (const source of sources) {
    const path = join(root, source);
    for (const file of source.includes('.') ? [path] : filesUnder(path))
      hash.update(file).update(readFileSync(file));
  }
  return hash.digest('hex');
}

function step(name, args) {
  const ran = spawnSync(process.execPath, args, {
    cwd: root,
    encoding: 'utf8',
    env: { ...process.env, NODE_ENV: 'production', ASTRO_TELEMETRY_DISABLED: '1' },
  });
  if (ran.status === 0) return;
  throw new Error(`${name} failed:\n${ran.stdout}\n${ran.stderr}`);
}

/** Compiles the measuring kernel where its source changed; whoever runs the sources needs it. */
export const buildKernel = () => step('Building the kernel', [join(root, 'src/engine/kernel/build.mjs')]);

/** Bundles entry points of processes for Node. What they import late is loaded late. */
export async function bundleProcesses(entryPoints, outdir) {
  const esbuild = await import('esbuild');
  await esbuild.build({
    entryPoints,
    outdir,
    outExtension: { '.js': '.mjs' },
    bundle: true,
    platform: 'node',
    target: 'node20',
    format: 'esm',
    splitting: true,
    chunkNames: 'parts/[name]-[hash]',
    packages: 'external',
    sourcemap: true,
    absWorkingDir: root,
    logLevel: 'error',
  });
}

/** Builds when a source changed. Throws the builder's words when a step fails. */
export async function build({ force = false } = {}) {
  const state = stateOfSources();
  if (!force && existsSync(mark) && readFileSync(mark, 'utf8') === state) return false;
  rmSync(mark, { force: true });
  buildKernel();
  step('Building the site', [join(root, 'node_modules/astro/astro.js'), 'build', '--silent']);
  const entries = readdirSync(join(root, 'workers'))
    .filter((name) => name.endsWith('.ts'))
    .map((name) => join(root, 'workers', name));
  await bundleProcesses(entries, join(root, 'dist/workers'));
  writeFileSync(mark, state);
  return true;
}

if (process.argv[1] === new URL(import.meta.url).pathname) {
  const made = await build({ force: process.argv.includes('--force') });
  console.log(made ? 'Built.' : 'Nothing changed since the last build.');
}
