/** Chooses by the first bytes, never by the name. */
import { UnreadableError, type ByteSource, type SampleSource } from '../source.ts';
import { readAiff } from './aiff.ts';
import { fourCc } from './chunks.ts';
import { PcmSource } from './pcm-source.ts';
import { readWave } from './wave.ts';

/** The samples of a WAV, RF64, BW64, AIFF or AIFF-C file; `null` for everything else. Throws UnreadableError. */
export async function openNative(bytes: ByteSource): Promise<SampleSource | null> {
  if (bytes.size === 0) throw new UnreadableError('empty', 'The file is empty.');
  const head = await bytes.read(0, 12);
  const [outer, inner] = [fourCc(head, 0), fourCc(head, 8)];
  const pcm =
    ['RIFF', 'RF64', 'BW64'].includes(outer) && inner === 'WAVE'
      ? await readWave(bytes)
      : outer === 'FORM' && (inner === 'AIFF' || inner === 'AIFC')
        ? await readAiff(bytes)
        : null;
  return pcm && new PcmSource(bytes, pcm);
}
