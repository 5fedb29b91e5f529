/** Plants the demo's organisations, people, channels and specs, once. */
import type { Db } from '../../src/server/db/connection.ts';
import { demoPassword } from '../../src/server/auth/demo-sign-ins.ts';
import { hashPassword } from '../../src/server/auth/passwords.ts';
import type { MemberScope } from '../../src/server/scope.ts';
import { channels, organisations, specs } from './demo-world.ts';

const idOf = (rows: { id: string }[]): string => rows[0].id;
const inForceFrom = "now() - interval '90 days'";

/** Whether the demo's world stands already; another database's organisations are none of our business. */
export async function worldStands(db: Db): Promise<'demo' | 'other' | 'empty'> {
  const rows: { slug: string }[] = await db('organisations').select('slug');
  if (rows.length === 0) return 'empty';
  return rows.some((row) => row.slug === organisations[0].slug) ? 'demo' : 'other';
}

/** In one transaction, so that half a world never stands. */
export async function plantWorld(db: Db): Promise<void> {
  const passwordHash = await hashPassword(demoPassword);
  await db.transaction(async (trx) => {
    const organisationIds = new Map<string, string>();
    const owners = new Map<string, string>();
    for (const { slug, name, isSupplier = false, isDistributor = false, people } of organisations) {
      const organisationId = idOf(
        await trx('organisations')
          .insert({
            slug,
            name,
            is_supplier: isSupplier,
            is_distributor: isDistributor,
            time_zone: 'Europe/London',
          })
          .returning('id'),
      );
      organisationIds.set(slug, organisationId);
      for (const person of people) {
        const userId = idOf(
          await trx('users')
            .insert({ email: person.email, name: person.name, password_hash: passwordHash })
            .returning('id'),
        );
        const membershipId = idOf(
          await trx('memberships')
            .insert({ organisation_id: organisationId, user_id: userId })
            .returning('id'),
        );
        await trx('membership_roles').insert(
          person.roles.map((role) => ({
            membership_id: membershipId,
            organisation_id: organisationId,
            role,
          })),
        );
        if (person.roles.includes('spec_owner')) owners.set(slug, userId);
      }
    }
    const organisation = (slug: string) => {
      const id = organisationIds.get(slug);
      if (!id) throw new Error(`The demo names an organisation that it does not make: ${slug}`);
      return id;
    };
    const specIds = new Map<string, string>();
    for (const spec of specs) {
      const owner = owners.get(spec.organisation) ?? null;
      const specId = idOf(
        await trx('specs')
          .insert({ organisation_id: organisation(spec.organisation), name: spec.name, created_by: owner })
          .returning('id'),
      );
      specIds.set(spec.key, specId);
      await trx('spec_versions').insert({
        organisation_id: organisation(spec.organisation),
        spec_id: specId,
        number: 1,
        body: JSON.stringify(spec.body),
        change_note: 'First version.',
        created_by: owner,
        published_by: owner,
        published_at: trx.raw(inForceFrom),
        in_force_from: trx.raw(inForceFrom),
      });
    }
    for (const channel of channels) {
      const organisationId = organisation(channel.organisation);
      const channelId = idOf(
        await trx('channels')
          .insert({
            organisation_id: organisationId,
            name: channel.name,
            kind: channel.kind,
            time_zone: channel.timeZone,
          })
          .returning('id'),
      );
      await trx('channel_assignments').insert(
        channel.specs.map(([contentKind, key]) => ({
          organisation_id: organisationId,
          channel_id: channelId,
          content_kind: contentKind,
          spec_id: specIds.get(key),
          in_force_from: trx.raw(inForceFrom),
          created_by: owners.get(channel.organisation) ?? null,
        })),
      );
      await trx('agreements').insert(
        channel.suppliers.map((supplier) => ({
          organisation_id: organisationId,
          channel_id: channelId,
          supplier_id: organisation(supplier),
        })),
      );
    }
  });
}

/** A demo person's scope, as their session would give it; the seed acts through the product's own services. */
export async function scopeOf(db: Db, email: string): Promise<MemberScope> {
  const row = await db('users as u')
    .join('memberships as m', 'm.user_id', 'u.id')
    .join('organisations as o', 'o.id', 'm.organisation_id')
    .where('u.email', email)
    .first(
      'u.id as userId',
      'u.name as userName',
      'm.id as membershipId',
      'o.id',
      'o.name',
      'o.is_supplier',
      'o.is_distributor',
      'o.time_zone',
    );
  if (!row) throw new Error(`The demo has no ${email}`);
  const roles: { role: MemberScope['roles'][number] }[] = await db('membership_roles')
    .where('membership_id', row.membershipId)
    .select('role');
  return {
    kind: 'member',
    sessionId: '00000000-0000-4000-8000-000000000000',
    userId: row.userId,
    userName: row.userName,
    email,
    organisationId: row.id,
    organisationName: row.name,
    timeZone: row.time_zone,
    isSupplier: row.is_supplier,
    isDistributor: row.is_distributor,
    roles: roles.map(({ role }) => role),
  };
}

/** The ids of the demo's channels by their keys. */
export async function channelIds(db: Db): Promise<Map<string, string>> {
  const rows: { id: string; name: string }[] = await db('channels').select('id', 'name');
  return new Map(
    channels.flatMap((channel) =>
      rows.filter((row) => row.name === channel.name).map((row) => [channel.key, row.id]),
    ),
  );
}
