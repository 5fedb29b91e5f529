/** What a report says of how it was measured, and what its dialog begins with. */
import type { DeliverableReport } from '@/domain/api/deliverables.ts';
import { fileClock, timeInFile } from '@/domain/file-clock.ts';
import { planWords } from '@/domain/plan-words.ts';
import { isOpen } from '@/domain/submission-states.ts';
import type { Measured } from './PlanDialog.tsx';

/** 'Measured from 10:01:30:00 to the end, as 5.1.' */
export function measuredWords({ plan, frameRate, file, measurement }: DeliverableReport): string {
  if (!file) return 'Not measured yet.';
  const clock = fileClock(file.format, frameRate);
  const how = planWords(plan, (seconds) => timeInFile(clock, seconds));
  const { format, isOrderAssumed } = file;
  const order = isOrderAssumed
    ? `, in the usual order of ${format.layout}, which the file does not tell`
    : format.channels > 2
      ? `, as ${format.layout}`
      : '';
  return `${measurement ? 'Measured' : 'To be measured'} ${how}${plan.presentations ? '' : order}.`;
}

/** What the dialog begins with; `null` where nothing may be changed: on its way, never measured, or fixed by a submission. */
export function changeable(report: DeliverableReport): Measured | null {
  const { id, plan, frameRate, plans, state, file } = report;
  const isFixed = report.channels.some(({ submission }) => submission && isOpen(submission.state));
  if (!file || isFixed || (state !== 'measured' && state !== 'unreadable')) return null;
  return { id, plan, frameRate, plans, state, ...file };
}
