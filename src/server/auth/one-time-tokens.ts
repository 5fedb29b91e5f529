/** Tokens of one-time links: 32 random bytes; only their SHA-256 is kept. */
import { createHash, randomBytes } from 'node:crypto';

/** What a token looks like in an address: 32 bytes in base64url. */
export const tokenPattern = /^[A-Za-z0-9_-]{43}$/;

export const newToken = (): string => randomBytes(32).toString('base64url');

export const hashOfToken = (token: string): Buffer => createHash('sha256').update(token, 'utf8').digest();
