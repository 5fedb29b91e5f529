/** Masters for the browser tests, made by the demo's own generator. */
import { writeFileSync } from 'node:fs';
import type { DemoDeliverable } from '../../migrations/seeds/demo-programmes.ts';
import { makeMaster } from '../../migrations/seeds/master.ts';

const base: DemoDeliverable = {
  by: 'mix@copperkettle.example',
  fileName: '',
  programme: 'The Tallow Road',
  episode: '1.01',
  version: 'Full mix stereo',
  kind: 'long_form',
  channels: [],
  character: 'drama',
  layout: 'stereo',
  seconds: 12,
  targetLufs: -23,
  then: 'keep',
};

/** Writes a 12 s stereo master of this loudness to `path`. */
export function writeMaster(path: string, targetLufs: number, seed: number): void {
  writeFileSync(path, makeMaster({ ...base, targetLufs }, seed));
}
