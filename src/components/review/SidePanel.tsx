import { useQuery } from '@tanstack/react-query';
import { useEffect } from 'react';
import { api } from '@/components/live/api.ts';
import { LoadLine } from '@/components/look/LoadLine.tsx';
import { Notice } from '@/components/look/Notice.tsx';
import { VerdictMark } from '@/components/look/VerdictMark.tsx';
import PassagePanel from '@/components/report/PassagePanel.tsx';
import {
  submissionReportSchema,
  presenceSchema,
  type SubmissionReport,
  type SubmissionRow,
} from '@/domain/api/submissions.ts';
import { fileClock } from '@/domain/file-clock.ts';
import { formatDuration } from '@/domain/figures-text.ts';
import { changesBetween } from './changes.ts';
import { rowName, whyNoDecision, worstRule } from './review-list.ts';

interface Props {
  row: SubmissionRow;
  decides: boolean;
  busy: boolean;
  onApprove: () => void;
  onReject: () => void;
  onWaive: () => void;
}

const presenceEveryMs = 15_000;

/** The row in focus, near enough to decide on: worst rule, what the last delivery read, the passage, the player. */
export function SidePanel({ row, decides, busy, onApprove, onReject, onWaive }: Props) {
  const { id } = row;
  const report = useQuery({
    queryKey: ['submissions', 'report', id],
    queryFn: ({ signal }) => api.get(`/api/v1/submissions/${id}`, submissionReportSchema, signal),
  });
  useEffect(() => {
    if (!decides) return;
    // Presence is a courtesy: while it cannot be told, deciding still answers a conflict.
    const tell = () =>
      void api.send('POST', `/api/v1/submissions/${id}/presence`, {}, presenceSchema).catch(() => undefined);
    tell();
    const timer = setInterval(tell, presenceEveryMs);
    return () => clearInterval(timer);
  }, [id, decides]);
  const rule = worstRule(row);
  // The passage is of the presentation that the worst rule is told of.
  const told = report.data?.presentations.find(({ name }) => name === rule?.presentation);
  const no = whyNoDecision(row);
  const fails = row.verdict.outcome === 'fail';
  return (
    <section aria-label="Row in focus" className="sheet grid content-start gap-3 p-4">
      <div className="flex flex-wrap items-baseline justify-between gap-3">
        <h2 className="text-[15px] font-semibold">
          <a href={`/review/${id}`} className="no-underline hover:underline">
            {rowName(row)}
          </a>
        </h2>
        <VerdictMark outcome={row.verdict.outcome} />
      </div>
      <p className="text-muted">
        {row.supplier.name} to {row.channel.name}, {row.format.layout},{' '}
        {formatDuration(row.format.durationSeconds)}
        {row.versionLabel && `, ${row.versionLabel}`}
        <br />
        <span className="text-[12.5px]">
          {row.specName}, version {row.specVersionNumber}
        </span>
      </p>
      {row.openBy.length > 0 && (
        <p className="text-teal">Open by {row.openBy.map(({ name }) => name).join(' and ')} too.</p>
      )}
      {rule && (
        <>
          {rule.metric !== null && rule.judged !== null && (
            <LoadLine
              metric={rule.metric}
              value={rule.judged}
              atLeast={rule.atLeast}
              atMost={rule.atMost}
              outcome={rule.outcome}
              size="row"
              width={318}
              label={`${rule.name} ${rule.judgedText} ${rule.unit}, ${rule.marginText}`}
            />
          )}
          <p>
            {rule.name}{' '}
            <span
              className={`num font-semibold ${rule.outcome === 'fail' ? 'text-hull' : rule.outcome === 'advisory' ? 'text-brass' : ''}`}
            >
              {rule.judgedText}
              {rule.judged !== null && rule.unit && ` ${rule.unit}`}
            </span>
            , {rule.marginText}; permitted is {rule.permittedText}.
            {report.data && <Before report={report.data} metric={rule.metric} />}
          </p>
        </>
      )}
      {report.error && <Notice tone="refused">{report.error.message}</Notice>}
      {report.data ? (
        <PassagePanel
          key={id}
          compact
          passageUrl={`/api/v1/submissions/${id}/passage?presentation=${told?.position ?? 1}`}
          clock={fileClock(row.format, report.data.frameRate)}
          audioUrl={report.data.isSet ? null : `/api/v1/submissions/${id}/audio`}
          specBody={report.data.specBody}
          integratedLufs={(told?.measurement ?? row).figures.loudness.integratedLufs}
          search=""
        />
      ) : (
        <div className="h-60" />
      )}
      {decides &&
        (no ? (
          <Notice>{no}</Notice>
        ) : (
          <div className="flex flex-wrap items-center gap-2">
            <button
              type="button"
              className={`btn ${fails ? 'btn-main' : ''}`}
              disabled={busy}
              onClick={onReject}
              aria-keyshortcuts="r"
            >
              Reject…{' '}
              <kbd aria-hidden="true" className="border-current! text-current!">
                r
              </kbd>
            </button>
            {fails ? (
              <button type="button" className="btn" disabled={busy} onClick={onWaive} aria-keyshortcuts="w">
                Waive…{' '}
                <kbd aria-hidden="true" className="border-current! text-current!">
                  w
                </kbd>
              </button>
            ) : (
              <button
                type="button"
                className="btn btn-main"
                disabled={busy}
                onClick={onApprove}
                aria-keyshortcuts="a"
              >
                Approve{' '}
                <kbd aria-hidden="true" className="border-current! text-current!">
                  a
                </kbd>
              </button>
            )}
          </div>
        ))}
    </section>
  );
}

/** What the same figure read in the delivery that this one replaces. */
function Before({ report, metric }: { report: SubmissionReport; metric: string | null }) {
  if (!report.replaces) return null;
  const change = changesBetween(report.replaces.figures, report.figures).find((one) => one.metric === metric);
  if (!change || change.before === null) return <> It replaces an earlier delivery.</>;
  return (
    <>
      {' '}
      The delivery before read <span className="num">{change.beforeText}</span>.
    </>
  );
}
