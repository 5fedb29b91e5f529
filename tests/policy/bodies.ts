/** A body that fits each route that takes one, about the holdings given. A route without one here is asked with {}. */
import { r128Body } from '../factories/world.ts';
import type { Holdings } from './holdings.ts';

type Body = (h: Holdings, n: number, side: 'supplier' | 'distributor') => unknown;

const nextYear = () => new Date(Date.now() + 365 * 24 * 3600_000).toISOString();

export const bodies: Record<string, Body> = {
  'POST /api/v1/me/organisation': (h, _, side) => ({ organisationId: h[side].id }),
  'PATCH /api/v1/deliverables': (h) => ({ items: [{ id: h.ids.spareDeliverable, versionLabel: 'v2' }] }),
  'PUT /api/v1/deliverables/[id]/plan': () => ({
    plan: { stream: 0, window: { startSeconds: 10, endSeconds: null }, presentations: null },
  }),
  'POST /api/v1/deliverable-sets': (h) => ({
    name: 'Reel 1',
    parts: [
      { deliverableId: h.ids.deliverable, speaker: 'L' },
      { deliverableId: h.ids.spareDeliverable, speaker: 'R' },
    ],
  }),
  'POST /api/v1/uploads': (_, n) => ({
    files: [{ fileName: `mix_${n}.wav`, byteSize: 50_000_000, lastModifiedMs: n }],
  }),
  'POST /api/v1/uploads/[id]/parts': () => ({ numbers: [1] }),
  'PUT /api/v1/uploads/[id]/parts': () => ({ number: 1, etag: '"e"', byteSize: 8 * 1024 ** 2 }),
  'POST /api/v1/uploads/[id]/complete': () => ({ sha256: 'a'.repeat(64) }),
  'POST /api/v1/submissions': (h) => ({
    items: [{ deliverableId: h.ids.spareDeliverable, channelId: h.ids.channel }],
  }),
  'POST /api/v1/submissions/decisions': (h) => ({
    items: [{ id: h.ids.submission, version: 1, decision: 'approve' }],
  }),
  'PATCH /api/v1/submissions/[id]': () => ({ airAt: nextYear() }),
  'POST /api/v1/submissions/[id]/notes': () => ({ text: 'Listen here.', atSeconds: 3 }),
  'POST /api/v1/specs': (_, n) => ({ name: `Policy spec ${n}`, body: r128Body }),
  'PUT /api/v1/specs/[id]/draft': () => ({ body: r128Body, changeNote: 'tighter' }),
  'POST /api/v1/specs/[id]/publish': () => ({ inForceFrom: nextYear() }),
  'POST /api/v1/channels': (_, n) => ({
    name: `Policy channel ${n}`,
    kind: 'television',
    timeZone: 'Europe/London',
  }),
  'PATCH /api/v1/channels/[id]': (_, n) => ({ name: `Renamed ${n}` }),
  'POST /api/v1/channels/[id]/assignments': (h) => ({
    contentKind: 'trailer',
    specId: h.ids.spec,
    inForceFrom: nextYear(),
  }),
  'POST /api/v1/channels/[id]/agreements': (h) => ({ supplierId: h.supplier.id }),
  'PATCH /api/v1/members/[id]': () => ({ roles: ['administrator'] }),
  'POST /api/v1/invitations': (_, n) => ({ email: `invited${n}@people.example`, roles: ['administrator'] }),
};
