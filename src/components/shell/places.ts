/** The places of the top bar that somebody of this standing may go to. */
import { allows, type Permission, type Standing } from '@/domain/permissions.ts';

export type Place = 'bench' | 'deliverables' | 'review' | 'channels' | 'specs' | 'members' | 'activity';

export function placesOf(who: Standing): { place: Place; name: string; href: string }[] {
  const all: [Place, string, string, Permission][] = [
    ['bench', 'Bench', '/bench', 'deliverable:upload'],
    ['deliverables', 'Deliverables', '/deliverables', 'deliverable:read'],
    ['review', who.isDistributor ? 'Review' : 'Submissions', '/review', 'submission:read'],
    ['channels', 'Channels', '/channels', 'channel:read'],
    ['specs', 'Specs', '/specs', 'spec:read'],
    ['members', 'Members', '/members', 'member:read'],
    ['activity', 'Activity', '/activity', 'activity:read'],
  ];
  return all
    .filter(([, , , permission]) => allows(who, permission))
    .map(([place, name, href]) => ({ place, name, href }));
}
