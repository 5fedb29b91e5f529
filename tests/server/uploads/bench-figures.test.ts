// From the bench through the upload to the service's own measurement: told, stored, compared.
import { tmpdir } from 'node:os';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { benchFiguresOf, type BenchFigures } from '../../../src/domain/bench-figures.ts';
import { openNative } from '../../../src/engine/containers/open.ts';
import { engineVersion } from '../../../src/engine/figures.ts';
import { measure } from '../../../src/engine/measure.ts';
import { findBenchFigures } from '../../../src/server/db/bench-figures-repository.ts';
import { db } from '../../../src/server/db/connection.ts';
import { markArrived } from '../../../src/server/db/deliverable-writes-repository.ts';
import type { MeasureElsewhere } from '../../../src/server/queue/measuring-contract.ts';
import type { MemberScope } from '../../../src/server/scope.ts';
import { getDeliverableReport } from '../../../src/server/services/deliverables.ts';
import { measureDeliverable } from '../../../src/server/services/measuring.ts';
import { measureObject } from '../../../src/server/services/measure-object.ts';
import { createUploads } from '../../../src/server/services/uploads.ts';
import { originalKey, putObject } from '../../../src/server/storage/storage.ts';
import { makeAssignment, makeSpecVersion } from '../../factories/world.ts';
import { valueOf } from '../answers.ts';
import { makeAgreedChannel, makePerson, openServiceWorld, organisationOf } from '../service-world.ts';
import { sineWave } from '../wave-file.ts';
import { fileBytes } from '../../../src/components/bench/file-bytes.ts';

let world: Awaited<ReturnType<typeof openServiceWorld>>;
let engineer: MemberScope;
let told: BenchFigures;
const wave = sineWave(5);
beforeAll(async () => {
  world = await openServiceWorld(12);
  engineer = await makePerson();
  const source = await openNative(fileBytes(new Blob([new Uint8Array(wave)])));
  if (!source) throw new Error('A WAV file was not taken for one');
  const [{ measurement }] = await measure(source);
  told = benchFiguresOf(measurement, engineVersion, 'engine');
});
afterAll(() => world.close());

const here: MeasureElsewhere = (task, options) =>
  measureObject(task, { ...options, onRead: () => {}, scratchDir: tmpdir() });

let count = 0;
async function begin(benchFigures?: BenchFigures, channelIds: string[] = []): Promise<string> {
  const file = { fileName: `tallow_${++count}.wav`, byteSize: wave.length, lastModifiedMs: count };
  const { items } = valueOf(
    await createUploads(engineer, [{ ...file, details: { channelIds }, benchFigures }]),
  );
  if (!items[0].ok) throw new Error(items[0].error.message);
  return items[0].value.deliverableId;
}
/** Puts the bytes where the browser would have put them, and has the service measure them. */
async function arrive(id: string) {
  await putObject(originalKey(engineer.organisationId, id), wave);
  await db().transaction((trx) => markArrived(trx, engineer, id, ''.padEnd(64, '0')).then(() => {}));
  await db()('deliverables').where({ id }).update({ sha256_declared: null });
  await measureDeliverable(id, here, new AbortController().signal);
  return valueOf(await getDeliverableReport(engineer, id));
}
const codes = (report: Awaited<ReturnType<typeof arrive>>) =>
  report.measurement?.findings.map(({ code }) => code);

describe('figures of the bench', () => {
  it('travel with the upload, and the service that measures the same says so', async () => {
    const id = await begin(told);
    expect(await findBenchFigures(db(), engineer, id)).toEqual(told);
    const report = await arrive(id);
    expect(report.bench).toMatchObject({ kind: 'same' });
    expect(codes(report)).not.toContain('measured-differently');
  });

  it('make a finding that names both where the service measures something else, and an advisory of every spec', async () => {
    const distributor = await makePerson(['spec_owner'], 'distributor');
    const channelId = await makeAgreedChannel(distributor, engineer);
    const { specId } = await makeSpecVersion(db(), organisationOf(distributor));
    await makeAssignment(db(), organisationOf(distributor), { id: channelId }, specId);
    const other = { ...told, truePeak: { ...told.truePeak, maxDbtp: -17.5 } };
    const report = await arrive(await begin(other, [channelId]));
    const finding = report.measurement?.findings.find(({ code }) => code === 'measured-differently');
    // The sine of the file peaks at -20 dBFS.
    expect(finding?.message).toMatch(
      /maximum true peak −17\.500 dBTP on the bench, −(19\.9\d\d|20\.0\d\d) dBTP by the service/,
    );
    expect(report.bench).toEqual({ kind: 'differs', message: finding?.message });
    expect(report.channels[0].verdict?.rules).toContainEqual(
      expect.objectContaining({ ruleId: 'integrity-measured-differently', outcome: 'advisory' }),
    );
  });

  it('are not compared with those of another engine, and the report says why', async () => {
    const report = await arrive(
      await begin({ ...told, engineVersion: '0.9.0', truePeak: { maxDbtp: 3, perChannelDbtp: [3, 3] } }),
    );
    expect(codes(report)).not.toContain('measured-differently');
    expect(report.bench).toEqual({
      kind: 'not-compared',
      message: `The bench measured with engine 0.9.0 and the service with ${engineVersion}, so the two are not compared.`,
    });
  });

  it('may be absent', async () => {
    const report = await arrive(await begin());
    expect(report.bench).toBeNull();
    expect(codes(report)).not.toContain('measured-differently');
  });

  it('are taken anew when a broken-off upload goes on, and are nobody else’s to read', async () => {
    const file = { fileName: 'gales_211.wav', byteSize: wave.length, lastModifiedMs: 7, details: {} };
    const first = valueOf(await createUploads(engineer, [file])).items[0];
    const again = valueOf(await createUploads(engineer, [{ ...file, benchFigures: told }])).items[0];
    if (!first.ok || !again.ok) throw new Error('The upload was refused');
    expect(again.value).toMatchObject({ deliverableId: first.value.deliverableId, resumed: true });
    expect(await findBenchFigures(db(), engineer, first.value.deliverableId)).toEqual(told);
    expect(await findBenchFigures(db(), await makePerson(), first.value.deliverableId)).toBeNull();
  });
});
