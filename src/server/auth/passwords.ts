/** Passwords: argon2id, 19 MiB, two passes, one lane (OWASP Password Storage Cheat Sheet, from memory). */
import { hash, verify } from '@node-rs/argon2';

const settings = { memoryCost: 19_456, timeCost: 2, parallelism: 1 } as const;

/** A self-describing argon2id hash with its own salt. */
export const hashPassword = (password: string): Promise<string> => hash(password.normalize('NFKC'), settings);

let decoy: Promise<string> | undefined;

/** Whether the password is right. Without a hash it takes as long and says no, so that timing names no accounts. */
export async function isPassword(password: string, passwordHash: string | null): Promise<boolean> {
  const right = await verify(
    passwordHash ?? (await (decoy ??= hashPassword('nobody has this one'))),
    password.normalize('NFKC'),
  );
  return right && passwordHash !== null;
}
