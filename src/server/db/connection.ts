/** The one connection pool of a process, and transactions that end in answers. */
import knex, { type Knex } from 'knex';
import pg from 'pg';
import { config } from '../config.ts';
import { RefusedError, type Answer } from '../refusals.ts';

/** A pool or a transaction: repositories do not care. */
export type Db = Knex;

// bigint columns here are byte sizes and counters, all under 2^53.
pg.types.setTypeParser(pg.types.builtins.INT8, (text) => Number(text));

let pool: Knex | undefined;

export function db(): Db {
  pool ??= knex({
    client: 'pg',
    connection: config().DATABASE_URL,
    pool: { min: 0, max: 8 },
    acquireConnectionTimeout: 10_000,
  });
  return pool;
}

/** Closes the pool; the next `db()` opens a new one. */
export async function closeDb(): Promise<void> {
  const open = pool;
  pool = undefined;
  await open?.destroy();
}

/** Runs `work` in one transaction. A refused answer, like a thrown RefusedError, rolls back and comes out as an answer. */
export async function inTransaction<T>(work: (trx: Db) => Promise<Answer<T>>): Promise<Answer<T>> {
  try {
    return await db().transaction(async (trx) => {
      const answer = await work(trx);
      if (!answer.ok) throw new RefusedError(answer.refusal);
      return answer;
    });
  } catch (error) {
    if (error instanceof RefusedError) return { ok: false, refusal: error.refusal };
    throw error;
  }
}
