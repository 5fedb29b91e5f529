import { describe, expect, it } from 'vitest';
import { activitySentence } from '../../src/domain/activity-sentence.ts';

const delivery = {
  programmeTitle: 'The Tallow Road',
  episodeLabel: '1.04',
  fileName: 'tallow_104.wav',
  channelName: 'Harrow One',
};

describe('an event in words', () => {
  it.each([
    ['submission.submitted', delivery, 'submitted The Tallow Road 1.04 for Harrow One'],
    ['submission.approved', delivery, 'approved The Tallow Road 1.04 for Harrow One'],
    [
      'submission.rejected',
      { ...delivery, reason: 'too loud' },
      'rejected The Tallow Road 1.04 for Harrow One: too loud',
    ],
    ['submission.taken_back', delivery, 'took back the decision on The Tallow Road 1.04 for Harrow One'],
    ['deliverable.uploaded', { ...delivery, programmeTitle: null }, 'uploaded tallow_104.wav'],
    ['spec.published', { name: 'Harrow long form', number: 3 }, 'published Harrow long form version 3'],
    [
      'agreement.made',
      { name: 'Two Rooks Studio', channelName: 'Harrow One' },
      'gave Two Rooks Studio leave to deliver to Harrow One',
    ],
    [
      'member.invited',
      { email: 'a@people.example', roles: ['QC operator', 'Spec owner'] },
      'invited a@people.example as QC operator and Spec owner',
    ],
  ])('%s', (action, detail, sentence) => {
    expect(activitySentence(action, detail)).toBe(sentence);
  });

  it('stands also where an old event kept less than newer ones do', () => {
    expect(activitySentence('submission.approved', {})).toBe('approved a delivery');
    expect(activitySentence('submission.rejected', { reason: 7, channelName: null })).toBe(
      'rejected a delivery: 7',
    );
  });

  it('reads as its name says where no sentence was written for it', () => {
    expect(activitySentence('guest.link_made', { channelName: 'Harrow One' })).toBe(
      'guest link made: Harrow One',
    );
    expect(activitySentence('constructor', {})).toBe('constructor');
  });
});
