/**
 * The CHAN chunk of an AIFF file: a tag for a known order, a mask, or a label for each audio channel.
 * Tags and labels from memory; what ffmpeg writes for 3.0, 5.0 and 5.1 agrees (tests/engine/layouts.test.ts);
 * under the tag of 7.1, sides first, it keeps its own order, rears first, which the file does not tell: the tag is believed.
 */
import { fromSpeakers, layoutOfMask, type Layout, type Speaker } from '../layouts.ts';

/** As much of the chunk as is read: a description for each of 128 audio channels. */
export const chanBytes = 12 + 128 * 20;

const byDescriptions = 0;
const byMask = 0x10000;
const descriptionBytes = 20;

/** The upper half of a tag names the order, its lower half counts the audio channels. */
const tagged: Record<number, readonly Speaker[]> = {
  100: ['M'],
  101: ['L', 'R'],
  113: ['L', 'R', 'C'],
  114: ['C', 'L', 'R'],
  117: ['L', 'R', 'C', 'Ls', 'Rs'],
  118: ['L', 'R', 'Ls', 'Rs', 'C'],
  119: ['L', 'C', 'R', 'Ls', 'Rs'],
  120: ['C', 'L', 'R', 'Ls', 'Rs'],
  121: ['L', 'R', 'C', 'LFE', 'Ls', 'Rs'],
  122: ['L', 'R', 'Ls', 'Rs', 'C', 'LFE'],
  123: ['L', 'C', 'R', 'Ls', 'Rs', 'LFE'],
  124: ['C', 'L', 'R', 'Ls', 'Rs', 'LFE'],
  128: ['L', 'R', 'C', 'LFE', 'Lss', 'Rss', 'Lrs', 'Rrs'],
};

const labelled: Record<number, Speaker> = {
  1: 'L',
  2: 'R',
  3: 'C',
  4: 'LFE',
  5: 'Ls',
  6: 'Rs',
  7: 'Lc',
  8: 'Rc',
  9: 'Cs',
  10: 'Lss',
  11: 'Rss',
  12: 'Tc',
  13: 'Ltf',
  14: 'Ctf',
  15: 'Rtf',
  16: 'Ltr',
  17: 'Ctr',
  18: 'Rtr',
  33: 'Lrs',
  34: 'Rrs',
  42: 'M',
};

/** The layout that a CHAN chunk tells; `null` where it tells none that fits so many audio channels. */
export function layoutOfChan(bytes: Uint8Array, audioChannels: number): Layout | null {
  if (bytes.length < 12) return null;
  const view = new DataView(bytes.buffer, bytes.byteOffset, bytes.byteLength);
  const tag = view.getUint32(0);
  if (tag === byMask) {
    const layout = layoutOfMask(view.getUint32(4), audioChannels);
    return layout.assumed ? null : layout;
  }
  const speakers =
    tag === byDescriptions
      ? described(view, audioChannels)
      : (tagged[tag >>> 16] as readonly Speaker[] | undefined);
  if (speakers?.length !== audioChannels || new Set(speakers).size !== audioChannels) return null;
  return fromSpeakers(speakers);
}

function described(view: DataView, audioChannels: number): Speaker[] {
  const count = Math.min(
    view.getUint32(8),
    audioChannels,
    Math.floor((view.byteLength - 12) / descriptionBytes),
  );
  const labels = Array.from({ length: count }, (_, i) => view.getUint32(12 + i * descriptionBytes));
  return labels.flatMap((label) => labelled[label] ?? []);
}
