// `npm start` and `npm run dev`: from a bare checkout to a running product, and everything ended again on Ctrl-C.
import { execFileSync } from 'node:child_process';
import { existsSync, readFileSync, rmSync, writeFileSync } from 'node:fs';
import { join } from 'node:path';
import { ensureNode, ensurePackages, ensurePrograms } from './machine.mjs';
import { dataFolder, makeFolder, root, wishedPorts } from './places.mjs';
import { freePort } from './ports.mjs';

const dev = process.argv.includes('--dev');
const began = performance.now();
const say = (text) => console.log(text);

/** One product per data folder: says where the other one is, and ends. A mark left by a killed one does not count. */
function claim(folder) {
  const mark = join(folder, 'running.json');
  if (existsSync(mark)) {
    const { pid, address } = JSON.parse(readFileSync(mark, 'utf8'));
    const alive =
      existsSync(`/proc/${pid}/cmdline`) &&
      readFileSync(`/proc/${pid}/cmdline`, 'utf8').includes('start.mjs');
    if (alive && pid !== process.pid) {
      say(
        `Plimsoll runs already${address ? ` at ${address}` : ', and is still starting'} (process ${pid}). End that one first, or use it.`,
      );
      process.exit(1);
    }
  }
  const write = (address) => writeFileSync(mark, JSON.stringify({ pid: process.pid, address }));
  write(null);
  return { opened: write, release: () => rmSync(mark, { force: true }) };
}

async function main() {
  ensureNode();
  ensurePackages();
  ensurePrograms(['postgresql', 'redis-server', 'ffmpeg']);
  const folder = makeFolder(dataFolder());
  const hold = claim(folder);
  const stops = [];
  let leaving = null;
  const leave = (code) =>
    (leaving ??= (async () => {
      say('\nEnding Plimsoll …');
      for (const stop of stops.reverse()) await stop().catch((error) => console.error(error.message));
      hold.release();
      say('Ended.');
      process.exit(code);
    })());
  for (const signal of ['SIGINT', 'SIGTERM', 'SIGHUP']) process.on(signal, () => void leave(0));

  try {
    await run(folder, hold, stops, () => leaving !== null);
  } catch (error) {
    if (leaving) return;
    console.error(`Plimsoll could not be started: ${error.message}`);
    await leave(1);
  }
}

async function run(folder, hold, stops, isLeaving) {
  const { environmentOf, secretsOf, startServices } = await import('./services.mjs');
  const { startProcess, untilReady } = await import('./processes.mjs');
  const { ensureDatabase } = await import('./postgres.mjs');
  const { build, buildKernel } = await import('./build.mjs');

  const ports = {};
  for (const [name, wished] of Object.entries(wishedPorts))
    ports[name] = await freePort(Number(process.env[`PLIMSOLL_${name.toUpperCase()}_PORT`] ?? wished));
  const secrets = secretsOf(folder);
  const servicesStarting = startServices({ folder, ports, secrets });
  servicesStarting.catch(() => {}); // told below, after the build
  if (dev) buildKernel();
  else {
    say('Building, if anything changed …');
    await build();
  }
  const services = await servicesStarting;
  stops.push(services.stop);
  const urls = await ensureDatabase(services.adminUrl, 'plimsoll', {
    ownerPassword: secrets.owner,
    appPassword: secrets.app,
  });
  const env = {
    ...process.env,
    ...environmentOf({ ports, secrets, folder, ...urls }),
    ...(dev && { NODE_ENV: 'development' }),
  };
  // From here on a step may fail: its own words say why.
  execFileSync(
    process.execPath,
    ['--import', 'tsx', 'node_modules/knex/bin/cli.js', 'migrate:latest', '--knexfile', 'knexfile.ts'],
    { cwd: root, env, stdio: ['ignore', 'ignore', 'inherit'] },
  );
  if (isLeaving()) return;

  const node = (name, args) => {
    const child = startProcess({
      name,
      command: process.execPath,
      args,
      env,
      cwd: root,
      logFolder: services.logFolder,
      restart: true,
    });
    stops.push(() => child.stop());
    return child;
  };
  const worker = (name) =>
    dev
      ? node(name, ['--import', 'tsx', `workers/${name}.ts`])
      : node(name, ['--enable-source-maps', `dist/workers/${name}.mjs`]);
  for (const name of ['sweeping', 'mail', 'measuring']) worker(name);
  const web = dev
    ? node('web', ['node_modules/astro/astro.js', 'dev', '--port', String(ports.web), '--host', '127.0.0.1'])
    : worker('web');
  const address = `http://127.0.0.1:${ports.web}`;
  await untilReady(web, async () => (await fetch(`${address}/api/health`).catch(() => null))?.ok ?? false);
  if (isLeaving()) return;
  hold.opened(address);
  const { demoPassword, demoSignIns } = await demoPeople();
  say(
    [
      '',
      `Plimsoll is open at ${address}   (${((performance.now() - began) / 1000).toFixed(1)} s)`,
      `Local mail:         http://127.0.0.1:${ports.inbox}`,
      '',
      `Demo sign-ins, all with the password ${demoPassword}:`,
      ...demoSignIns.map((one) => `  ${one.email.padEnd(30)} ${one.label}`),
      '',
      `Data and logs are in ${folder}. Ctrl-C ends everything.`,
      '',
    ].join('\n'),
  );
  const seed = startProcess({
    name: 'seed',
    command: process.execPath,
    args: [
      ...(dev
        ? ['--import', 'tsx', 'workers/seed-demo.ts']
        : ['--enable-source-maps', 'dist/workers/seed-demo.mjs']),
      // The browser tests bring sound of their own.
      ...(process.env.PLIMSOLL_DEMO === 'world' ? ['--world-only'] : []),
    ],
    env,
    cwd: root,
    logFolder: services.logFolder,
  });
  stops.push(() => seed.stop(2));
  void seed.ended.then((how) => {
    if (how === 0) say('The demo’s world stands.');
    else if (!isLeaving())
      console.error(`The demo could not be filled in whole (${how}):\n${seed.lastWords()}`);
  });
}

/** The demo's people, as the sign-in page lists them. */
async function demoPeople() {
  const { register } = await import('tsx/esm/api');
  const unregister = register();
  const people = await import('../../src/server/auth/demo-sign-ins.ts');
  await unregister();
  return people;
}

await main();
