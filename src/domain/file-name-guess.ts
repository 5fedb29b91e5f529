/** What a file's name carries of what the file is. Habits of naming are common practice, no source. */
import type { ContentKind } from './vocabulary.ts';

export interface FileNameGuess {
  programmeTitle: string | null;
  episodeLabel: string | null;
  versionLabel: string | null;
  contentKind: ContentKind;
}

/** Words that name the kind of content, as whole words of the name. */
const kindWords: [ContentKind, RegExp][] = [
  ['trailer', /^(trailers?|teasers?|promos?|trail)$/],
  ['short_form', /^(spots?|adverts?|ads?|tvc|commercials?|bumpers?|stings?)$/],
  ['podcast_episode', /^(podcasts?|pod|pods)$/],
  ['music_programme', /^(concerts?|recitals?|gigs?)$/],
];
/** Words about the mix: they say the version, and never the programme. */
const layoutWords: Record<string, string> = {
  st: 'stereo',
  stereo: 'stereo',
  lr: 'stereo',
  mono: 'mono',
  surround: 'surround',
  '2.0': 'stereo',
  '5.1': '5.1',
  '7.1': '7.1',
  '5.1.4': '5.1.4',
  '7.1.4': '7.1.4',
  'm&e': 'M&E',
  mne: 'M&E',
};
/** The same without a dot: a number, so only where the name speaks of the mix or has said its episode. */
const layoutNumbers: Record<string, string> = {
  '20': 'stereo',
  '51': '5.1',
  '71': '7.1',
  '514': '5.1.4',
  '714': '7.1.4',
};
const fillers =
  /^(mix|fullmix|full|final|master|mstr|print|deliver|delivery|export|bounce|16b|24b|16bit|24bit|44k|48k|96k|44100|48000|96000|wav|r128)$/;

const seasonEpisode = (season: string, number: string) => `${Number(season)}.${number.padStart(2, '0')}`;

/** What one word, with the word after it, says of the episode; `took` counts the words. */
function episodeIn(word: string, next: string): { label: string; took: number } | null {
  const pair = /^s(\d{1,2})$/.exec(word);
  const second = /^e(\d{1,3})$/.exec(next);
  if (pair && second) return { label: seasonEpisode(pair[1], second[1]), took: 2 };
  const season =
    /^s(\d{1,2})e(\d{1,3})$/.exec(word) ??
    /^(\d{1,2})x(\d{2,3})$/.exec(word) ??
    /^(\d{1,2})\.(\d{1,2})$/.exec(word);
  if (season) return { label: seasonEpisode(season[1], season[2]), took: 1 };
  if (/^(ep|eps|episode)$/.test(word) && /^\d{1,4}$/.test(next))
    return { label: String(Number(next)), took: 2 };
  const glued = /^(?:ep|episode|e)(\d{1,4})$/.exec(word);
  return glued ? { label: String(Number(glued[1])), took: 1 } : null;
}

function versionIn(word: string, next: string): { label: string; took: number } | null {
  const glued = /^(?:v|ver|version|rev|take|tk)(\d{1,3})$/.exec(word);
  if (glued) return { label: `v${Number(glued[1])}`, took: 1 };
  return /^(v|ver|version|rev|take)$/.test(word) && /^\d{1,3}$/.test(next)
    ? { label: `v${Number(next)}`, took: 2 }
    : null;
}

/** A number that stands alone: 104 is the fourth of the first season, as editors write it. */
function bareNumberIn(word: string): string | null {
  if (/^[1-9]\d{2}$/.test(word)) return seasonEpisode(word.slice(0, 1), word.slice(1));
  return /^\d{1,2}$/.test(word) ? String(Number(word)) : null;
}

/**
 * Guesses programme, episode, version and kind from a file name. `knownProgrammes` are titles that the organisation has
 * already: one that the name tells of ('tallow' of 'The Tallow Road') is preferred to the words of the name.
 * What the name does not carry is null; the kind is long form where nothing says otherwise.
 */
export function guessFromFileName(fileName: string, knownProgrammes: readonly string[] = []): FileNameGuess {
  const words = wordsOf(fileName);
  const title: string[] = [];
  const layouts = new Set<string>();
  let version: string | null = null;
  let episode: string | null = null;
  let contentKind: ContentKind | null = null;
  let ofTheMix = false;

  for (let i = 0; i < words.length; i++) {
    const word = words[i].toLowerCase();
    const next = words[i + 1]?.toLowerCase() ?? '';
    const begun = title.length > 0;
    const kind = kindWords.find(([, pattern]) => pattern.test(word.replace(/\d+$/, '')))?.[0];
    const glued = /^(?:full)?mix(st|stereo|mono|20|51|71|514|714)$/.exec(word)?.[1];
    const layout: string | undefined =
      (glued && (layoutWords[glued] ?? layoutNumbers[glued])) ??
      (begun ? layoutWords[word] : undefined) ??
      (begun && (ofTheMix || episode !== null) ? layoutNumbers[word] : undefined);
    const found: ReturnType<typeof episodeIn> = layout ? null : episodeIn(word, next);
    const revision = versionIn(word, next);
    if (layout) {
      layouts.add(layout);
      ofTheMix = true;
    } else if (kind) {
      contentKind ??= kind;
      const number = /\d+$/.exec(word)?.[0] ?? (/^\d{1,3}$/.test(next) ? words[++i] : undefined);
      if (number) episode ??= kind === 'short_form' ? `Spot ${Number(number)}` : String(Number(number));
    } else if (found) {
      episode ??= found.label;
      i += found.took - 1;
    } else if (revision) {
      version = revision.label;
      i += revision.took - 1;
    } else if (/^(19|20)\d{6}$/.test(word) || (begun && fillers.test(word))) {
      ofTheMix ||= /mix$/.test(word);
    } else if (begun && bareNumberIn(word) !== null) {
      episode ??= bareNumberIn(word);
    } else {
      title.push(words[i]);
    }
  }

  const programmeTitle =
    knownProgramme(title, knownProgrammes) ?? (title.length > 0 ? titleCase(title) : null);
  const versionWords = [...layouts, ...(version ? [version] : [])];
  return {
    programmeTitle,
    episodeLabel: programmeTitle === null ? null : episode,
    versionLabel: versionWords.length > 0 ? versionWords.join(' ') : null,
    contentKind: contentKind ?? 'long_form',
  };
}

/** Words of the name without its ending; 'TallowRoad' is two, '1.04' stays one. */
function wordsOf(fileName: string): string[] {
  return fileName
    .replace(/\.[a-z][a-z0-9]{1,4}$/i, '')
    .replace(/([a-z])([A-Z][a-z])/g, '$1 $2')
    .split(/[\s_\-–—+()[\],]+/)
    .flatMap((run) => run.match(/(?<![a-z0-9])\d{1,2}(?:\.\d{1,2}){1,2}(?!\d)|[^.]+/gi) ?? []);
}

const plain = (text: string) =>
  text
    .toLowerCase()
    .normalize('NFKD')
    .replace(/\p{M}/gu, '')
    .replace(/&/g, ' and ')
    .split(/[^a-z0-9]+/)
    .filter((word) => word !== '' && !['the', 'a', 'an', 'and'].includes(word));

/** The known title of which the name tells most: all of its words, or its first ones with nothing left over in the name. */
function knownProgramme(words: readonly string[], titles: readonly string[]): string | null {
  const said = plain(words.join(' '));
  if (said.length === 0) return null;
  let best: string | null = null;
  let bestCount = 0;
  let tied = false;
  for (const title of titles) {
    const wanted = plain(title);
    let count = 0;
    while (count < wanted.length && said[count] === wanted[count]) count++;
    const tells = count > 0 && (count === wanted.length || count === said.length);
    if (!tells || count < bestCount) continue;
    tied = count === bestCount;
    best = title;
    bestCount = count;
  }
  return tied ? null : best;
}

const titleCase = (words: readonly string[]) =>
  words
    .map((word) => (word === word.toLowerCase() ? word.charAt(0).toUpperCase() + word.slice(1) : word))
    .join(' ');
