/** Makes a master of a demo deliverable: synthesised, brought to its loudness by the product's own engine, written as WAV. */
import wavefile from 'wavefile';
import { Meter } from '../../src/engine/meter.ts';
import { layoutOfCount } from '../../src/engine/layouts.ts';
import type { DemoDeliverable } from './demo-programmes.ts';
import { addFault, declareLoudness } from './faults.ts';
import { addOver, applyGain, limit, synthesise } from './synthesis.ts';

const ceilingDbfs = -3;

function integratedOf(planar: Float64Array[], sampleRateHz: number): number {
  const frames = planar[0].length;
  const interleaved = new Float64Array(frames * planar.length);
  planar.forEach((samples, c) => samples.forEach((x, i) => (interleaved[i * planar.length + c] = x)));
  const meter = new Meter({
    sampleRateHz,
    encoding: { kind: 'float', bytes: 8, littleEndian: true },
    frameChannels: planar.length,
    audioChannels: planar.map((_, c) => c),
    speakers: layoutOfCount(planar.length).speakers,
  });
  meter.process(new Uint8Array(interleaved.buffer), frames);
  const { integratedLufs } = meter.result().figures.loudness;
  if (integratedLufs === null) throw new Error('A demo programme came out silent');
  return integratedLufs;
}

const peakOf = (planar: Float64Array[]) =>
  planar.reduce((peak, samples) => samples.reduce((p, x) => Math.max(p, Math.abs(x)), peak), 0);

/** Tells the WAV what its six audio channels are: WAVE_FORMAT_EXTENSIBLE, mask 0x3F, sub-format PCM. */
function nameSurround(wave: wavefile.WaveFile): void {
  const subformat = [1, 0x00100000, 0xaa000080, 0x719b3800];
  Object.assign(wave.fmt as object, {
    audioFormat: 0xfffe,
    chunkSize: 40,
    cbSize: 22,
    validBitsPerSample: 24,
    dwChannelMask: 0x3f,
    subformat,
  });
}

/** The bytes of the deliverable's WAV. The same every time. */
export function makeMaster(demo: DemoDeliverable, seed: number): Uint8Array {
  const sampleRateHz = demo.sampleRateHz ?? 48_000;
  const planar = synthesise({ ...demo, sampleRateHz, seed });
  // Limiting lowers the loudness a little: a few rounds settle it.
  for (let round = 0; round < 3; round++) {
    applyGain(planar, demo.targetLufs - integratedOf(planar, sampleRateHz));
    if (peakOf(planar) <= 10 ** (ceilingDbfs / 20)) break;
    limit(planar, ceilingDbfs, sampleRateHz);
  }
  if (demo.over)
    addOver(
      planar,
      demo.over.audioChannel,
      demo.over.at * demo.seconds,
      demo.over.truePeakDbtp,
      sampleRateHz,
    );
  if (demo.fault) addFault(planar, demo.fault, sampleRateHz);
  const depth = demo.bitDepth ?? '24';
  const full = 2 ** (Number(depth) - 1);
  const integers = planar.map((audioChannel) =>
    Int32Array.from(audioChannel, (x) => Math.max(-full, Math.min(full - 1, Math.round(x * full)))),
  );
  const wave = new wavefile.WaveFile();
  wave.fromScratch(integers.length, sampleRateHz, depth, integers.length === 1 ? integers[0] : integers);
  if (demo.layout === '5.1') nameSurround(wave);
  const written = wave.toBuffer();
  const bytes = demo.fault === 'declares-wrong' ? declareLoudness(written) : written;
  return demo.truncateShare ? bytes.subarray(0, Math.round(bytes.length * (1 - demo.truncateShare))) : bytes;
}
