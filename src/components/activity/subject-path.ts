import { allows, type Standing } from '@/domain/permissions.ts';

/** Where an event's subject can be seen by this person; `null` when it has no page, or none for them. */
export function subjectPath(who: Standing, subject: { kind: string; id: string }): string | null {
  switch (subject.kind) {
    case 'deliverable':
      return allows(who, 'deliverable:read') ? `/deliverables/${subject.id}` : null;
    case 'submission':
      return allows(who, 'submission:read') ? `/review/${subject.id}` : null;
    case 'spec':
      return allows(who, 'spec:read') ? `/specs/${subject.id}` : null;
    case 'channel':
      return allows(who, 'channel:read') ? `/channels/${subject.id}` : null;
    case 'member':
    case 'invitation':
      return allows(who, 'member:read') ? '/members' : null;
    default:
      return null;
  }
}
