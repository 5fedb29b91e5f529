/** Faults that a master may have beside its loudness, put into sound and file on purpose. */

export const demoFaults = [
  'line-up-tone',
  'drop-outs',
  'clipped',
  'dc-offset',
  'dual-mono',
  'out-of-phase',
  'lfe-swapped',
  'silent-right',
  'band-limited',
  'long-silence',
  'unused-bits',
  'declares-wrong',
] as const;
export type DemoFault = (typeof demoFaults)[number];

const each = (planar: Float64Array[], change: (x: number, i: number, c: number) => number) =>
  planar.forEach((samples, c) => samples.forEach((x, i) => (samples[i] = change(x, i, c))));

/** A low-pass of 64 taps, Hann-windowed: steep enough to look like a coded file. */
function lowPass(samples: Float64Array, hz: number, rate: number): Float64Array {
  const taps = 65;
  const weights = Array.from({ length: taps }, (_, k) => {
    const t = k - (taps - 1) / 2;
    const sinc = t === 0 ? (2 * hz) / rate : Math.sin((2 * Math.PI * hz * t) / rate) / (Math.PI * t);
    return sinc * (0.5 + 0.5 * Math.cos((2 * Math.PI * t) / taps));
  });
  return samples.map((_, i) => {
    let sum = 0;
    for (let k = 0; k < taps; k++) sum += weights[k] * (samples[i - k] ?? 0);
    return sum;
  });
}

const makers: Partial<Record<DemoFault, (planar: Float64Array[], rate: number) => void>> = {
  // EBU R 68: 1 kHz at -18 dBFS, then silence, then the programme.
  'line-up-tone': (planar, rate) =>
    each(planar, (x, i) =>
      i < 6 * rate ? 10 ** (-18 / 20) * Math.sin((2 * Math.PI * 1000 * i) / rate) : i < 7 * rate ? 0 : x,
    ),
  'drop-outs': (planar, rate) => {
    for (const [at, milliseconds] of [
      [4.1, 12],
      [9.6, 30],
      [15.25, 5],
    ])
      planar[0].fill(
        0,
        Math.round(at * rate),
        Math.round(at * rate) + Math.round((milliseconds * rate) / 1000),
      );
  },
  clipped: (planar) => each(planar, (x) => Math.max(-1, Math.min(1, x * 4))),
  'dc-offset': (planar) => each(planar, (x) => x + 0.012),
  'dual-mono': (planar) => planar[1].set(planar[0]),
  'out-of-phase': (planar) => each([planar[1]], (_, i) => -planar[0][i]),
  // Film order in a file that says the usual one: the LFE plays what the surrounds should.
  'lfe-swapped': (planar) => {
    const [, , centre, lfe] = planar.map((samples) => samples.slice());
    planar[3].set(centre);
    planar[2].set(lfe.map((x) => x * 1e-6));
  },
  'silent-right': (planar) => planar[1].fill(0),
  'band-limited': (planar, rate) => planar.forEach((samples) => samples.set(lowPass(samples, 10_500, rate))),
  'long-silence': (planar, rate) =>
    planar.forEach((samples) => samples.fill(0, 8 * rate, Math.round(13.5 * rate))),
  'unused-bits': (planar) => each(planar, (x) => Math.round(x * 32_768) / 32_768),
};

/** Puts the fault into the finished mix, in place. */
export const addFault = (planar: Float64Array[], fault: DemoFault, rate: number): void =>
  makers[fault]?.(planar, rate);

/** A bext chunk of version 2 (EBU Tech 3285) that declares -23.0 LUFS and -3.0 dBTP, put behind the RIFF head. */
export function declareLoudness(wav: Uint8Array): Uint8Array {
  const chunk = new Uint8Array(8 + 602);
  const view = new DataView(chunk.buffer);
  [...'bext'].forEach((letter, i) => (chunk[i] = letter.charCodeAt(0)));
  view.setUint32(4, 602, true);
  view.setUint16(8 + 346, 2, true);
  [-2300, 0x7fff, -300, 0x7fff, 0x7fff].forEach((value, i) => view.setInt16(8 + 412 + 2 * i, value, true));
  const out = new Uint8Array(wav.length + chunk.length);
  out.set(wav.subarray(0, 12));
  out.set(chunk, 12);
  out.set(wav.subarray(12), 12 + chunk.length);
  new DataView(out.buffer).setUint32(4, out.length - 8, true);
  return out;
}
