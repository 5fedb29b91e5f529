import { VerdictMark } from '@/components/look/VerdictMark.tsx';
import type { SubmissionReport } from '@/domain/api/submissions.ts';
import { changesBetween } from './changes.ts';

interface Props {
  before: NonNullable<SubmissionReport['replaces']>;
  after: SubmissionReport;
}

/** What changed against the delivery that this one replaces, figure by figure. */
export function ChangeTable({ before, after }: Props) {
  return (
    <section className="sheet p-4">
      <h2 className="mb-1 text-[13px] font-semibold">
        Change against <a href={`/review/${before.id}`}>the delivery before</a>
      </h2>
      <table className="rows" aria-label="Change against the delivery before">
        <thead>
          <tr>
            <th scope="col">Figure</th>
            <th scope="col" className="n">
              Before
            </th>
            <th scope="col" className="n">
              Now
            </th>
            <th scope="col" className="n">
              Change
            </th>
          </tr>
        </thead>
        <tbody>
          <tr>
            <td>Verdict</td>
            <td className="n">
              <VerdictMark outcome={before.outcome} />
            </td>
            <td className="n">
              <VerdictMark outcome={after.verdict.outcome} />
            </td>
            <td />
          </tr>
          {changesBetween(before.figures, after.figures).map((one) => (
            <tr key={one.metric}>
              <td>
                {one.name} <span className="unit">{one.unit}</span>
              </td>
              <td className="n num">{one.beforeText}</td>
              <td className="n num">{one.afterText}</td>
              <td className="n num font-semibold">{one.changeText}</td>
            </tr>
          ))}
        </tbody>
      </table>
    </section>
  );
}
