import RedisMock from 'ioredis-mock';
import { beforeEach, describe, expect, it } from 'vitest';
import { failuresPerAddress, failuresPerEmail, signInLimit } from '../../../src/server/auth/sign-in-limit.ts';

const redis = new RedisMock();

async function takeMany(times: number, email: (i: number) => string, address: (i: number) => string) {
  const limit = signInLimit(redis);
  let wait: number | null = null;
  for (let i = 0; i < times; i += 1) wait = await limit.take(email(i), address(i));
  return wait;
}

describe('the limit of sign-in tries', () => {
  beforeEach(async () => {
    await redis.flushall();
  });

  it('lets the last allowed try of an e-mail address pass and holds back the next, from wherever it comes', async () => {
    const from = (i: number) => `10.0.0.${i}`;
    expect(await takeMany(failuresPerEmail, () => 'a@people.example', from)).toBeNull();
    const wait = await signInLimit(redis).take('a@people.example', '10.9.9.9');
    expect(wait).toBeGreaterThan(0);
    expect(wait).toBeLessThanOrEqual(15 * 60);
  });

  it('does not hold back another person for it', async () => {
    await takeMany(
      failuresPerEmail + 1,
      () => 'a@people.example',
      (i) => `10.0.0.${i}`,
    );
    expect(await signInLimit(redis).take('b@people.example', '10.9.9.9')).toBeNull();
  });

  it('holds back a network address that tries many people', async () => {
    expect(
      await takeMany(
        failuresPerAddress,
        (i) => `p${i}@people.example`,
        () => '10.0.0.1',
      ),
    ).toBeNull();
    expect(await signInLimit(redis).take('new@people.example', '10.0.0.1')).toBeGreaterThan(0);
    expect(await signInLimit(redis).take('new@people.example', '10.0.0.2')).toBeNull();
  });

  it('does not count tries that the e-mail limit held back against the network address', async () => {
    await takeMany(
      failuresPerAddress + failuresPerEmail,
      () => 'a@people.example',
      () => '10.0.0.1',
    );
    expect(await signInLimit(redis).take('b@people.example', '10.0.0.1')).toBeNull();
  });

  it('forgets the failures of somebody who gets it right, and does not count right ones against the address', async () => {
    const limit = signInLimit(redis);
    await takeMany(
      failuresPerEmail - 1,
      () => 'a@people.example',
      () => '10.0.0.1',
    );
    for (let i = 0; i < failuresPerAddress; i += 1) {
      expect(await limit.take('a@people.example', '10.0.0.1')).toBeNull();
      await limit.giveBack('a@people.example', '10.0.0.1');
    }
    expect(
      await takeMany(
        failuresPerEmail,
        () => 'a@people.example',
        () => '10.0.0.1',
      ),
    ).toBeNull();
  });
});
