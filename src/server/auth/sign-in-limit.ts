/** How often somebody may fail to sign in: per e-mail address and per network address, counted in Redis. */
import type { Redis } from 'ioredis';
import { RateLimiterMemory, RateLimiterRedis, RateLimiterRes } from 'rate-limiter-flexible';

export interface TryLimit {
  /** Takes one try. `null`: go on; else the seconds to wait. */
  take(email: string, address: string): Promise<number | null>;
}

export interface SignInLimit extends TryLimit {
  /** Gives the try back after a right password; earlier failures of that e-mail are forgotten. */
  giveBack(email: string, address: string): Promise<void>;
}

export const failuresPerEmail = 10;
/** A post house shares one address. */
export const failuresPerAddress = 60;
const windowSeconds = 15 * 60;

/** When Redis is away each process counts for itself (insurance), rather than refusing or trusting everybody. */
function limiter(redis: Redis, keyPrefix: string, points: number) {
  const options = { keyPrefix, points, duration: windowSeconds };
  return new RateLimiterRedis({
    ...options,
    storeClient: redis,
    rejectIfRedisNotReady: true,
    insuranceLimiter: new RateLimiterMemory(options),
  });
}

async function consume(from: RateLimiterRedis, key: string): Promise<number | null> {
  try {
    await from.consume(key);
    return null;
  } catch (answer) {
    if (answer instanceof RateLimiterRes) return Math.ceil(answer.msBeforeNext / 1000);
    throw answer;
  }
}

export function signInLimit(redis: Redis): SignInLimit {
  const byEmail = limiter(redis, 'sign-in:email', failuresPerEmail);
  const byAddress = limiter(redis, 'sign-in:address', failuresPerAddress);
  return {
    async take(email, address) {
      // One after the other: who is over the first limit must not eat up the second for their neighbours.
      return (await consume(byEmail, email)) ?? (await consume(byAddress, address));
    },
    async giveBack(email, address) {
      await byEmail.delete(email);
      await byAddress.reward(address);
    },
  };
}

/** How often a new password may be asked for: a mailbox must not be filled by strangers. */
export function resetLimit(redis: Redis): TryLimit {
  const byEmail = limiter(redis, 'reset:email', 5);
  const byAddress = limiter(redis, 'reset:address', 30);
  return {
    async take(email, address) {
      return (await consume(byAddress, address)) ?? (await consume(byEmail, email));
    },
  };
}
