import { describe, expect, it } from 'vitest';
import { guessFromFileName } from '../../src/domain/file-name-guess.ts';

const known = ['The Tallow Road', 'Small Gales', 'Salt & Signal', 'Third Lantern', 'Tidewater Bakery'];

describe('guessing from a file name', () => {
  // Names as the demo scenario invents them.
  it.each([
    ['tallow_104_mix51_v2.wav', 'The Tallow Road', '1.04', '5.1 v2', 'long_form'],
    ['tallow_101_mixst_v1.wav', 'The Tallow Road', '1.01', 'stereo v1', 'long_form'],
    ['Small Gales 2.11 stereo v3.wav', 'Small Gales', '2.11', 'stereo v3', 'long_form'],
    ['small_gales_212_st_v2.wav', 'Small Gales', '2.12', 'stereo v2', 'long_form'],
    ['The.Tallow.Road.S01E04.5.1.wav', 'The Tallow Road', '1.04', '5.1', 'long_form'],
    ['TallowRoad-s1-e7.aif', 'The Tallow Road', '1.07', null, 'long_form'],
    ['tallow 1x08 final.wav', 'The Tallow Road', '1.08', null, 'long_form'],
    ['tidewater_bakery_spot07_v1.wav', 'Tidewater Bakery', 'Spot 7', 'v1', 'short_form'],
    ['Tidewater Bakery advert.wav', 'Tidewater Bakery', null, null, 'short_form'],
    ['tallow_trailer_stereo.wav', 'The Tallow Road', null, 'stereo', 'trailer'],
    ['Small Gales promo 2.wav', 'Small Gales', '2', null, 'trailer'],
    ['salt_signal_ep12.wav', 'Salt & Signal', '12', null, 'long_form'],
    ['Third Lantern podcast Episode 5 mono.mp3', 'Third Lantern', '5', 'mono', 'podcast_episode'],
  ])('reads %s', (name, programmeTitle, episodeLabel, versionLabel, contentKind) => {
    expect(guessFromFileName(name, known)).toEqual({
      programmeTitle,
      episodeLabel,
      versionLabel,
      contentKind,
    });
  });

  it('takes the title from the name where no programme is known', () => {
    expect(guessFromFileName('harbour_lights_ep3_v1.wav')).toMatchObject({
      programmeTitle: 'Harbour Lights',
      episodeLabel: '3',
    });
  });

  it('does not choose between two programmes that the name tells of alike', () => {
    expect(guessFromFileName('harbour_02.wav', ['Harbour Lights', 'Harbour Nights']).programmeTitle).toBe(
      'Harbour',
    );
  });

  it('prefers the programme of which the name tells more', () => {
    expect(guessFromFileName('harbour nights 2.wav', ['Harbour', 'Harbour Nights']).programmeTitle).toBe(
      'Harbour Nights',
    );
  });

  it('keeps a number that is the title', () => {
    expect(guessFromFileName('1917 ep2.wav')).toMatchObject({ programmeTitle: '1917', episodeLabel: '2' });
  });

  it('claims nothing of a name that says nothing', () => {
    expect(guessFromFileName('20261201.wav')).toEqual({
      programmeTitle: null,
      episodeLabel: null,
      versionLabel: null,
      contentKind: 'long_form',
    });
  });
});
