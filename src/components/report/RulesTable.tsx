import { LoadLine } from '@/components/look/LoadLine.tsx';
import { outcomeTone, VerdictMark } from '@/components/look/VerdictMark.tsx';
import type { RuleVerdict, VerdictBody } from '@/domain/verdict.ts';

const worstFirst = { fail: 0, advisory: 1, not_judged: 2, pass: 3 };
const inOrder = (rules: readonly RuleVerdict[]) =>
  [...rules].sort(
    (a, b) =>
      Number(b.metric !== null && b.judged !== null) - Number(a.metric !== null && a.judged !== null) ||
      worstFirst[a.outcome] - worstFirst[b.outcome],
  );

/** Every rule of a verdict: the figure, the load line, the margin, what is permitted, and what a breach means. */
export function RulesTable({ verdict }: { verdict: VerdictBody }) {
  return (
    <table className="rows" aria-label="Rules">
      <thead className="sr-only">
        <tr>
          {['Verdict', 'Rule', 'Figure', 'Load line', 'Margin', 'Permitted', 'A breach'].map((name) => (
            <th key={name} scope="col">
              {name}
            </th>
          ))}
        </tr>
      </thead>
      <tbody>
        {inOrder(verdict.rules).map((rule) => (
          <tr
            key={rule.ruleId}
            className="max-md:grid max-md:grid-cols-2 max-md:border-b max-md:border-hairline max-md:py-2 max-md:[&>td]:h-auto max-md:[&>td]:border-0 max-md:[&>td]:py-1"
          >
            <td className="w-28">
              <VerdictMark outcome={rule.outcome} />
            </td>
            <td className="w-48 max-md:text-right">{rule.name}</td>
            <td className="n w-40 max-md:text-left!">
              <span className="num text-[17px] font-semibold">{rule.judgedText}</span>
              {rule.judged !== null && rule.unit && <span className="unit">{rule.unit}</span>}
            </td>
            <td className="py-2! max-md:order-last max-md:col-span-2 md:w-[430px]">
              {rule.metric !== null && rule.judged !== null && (
                <LoadLine
                  metric={rule.metric}
                  value={rule.judged}
                  atLeast={rule.atLeast}
                  atMost={rule.atMost}
                  outcome={rule.outcome}
                  size="row"
                  label={`${rule.name} ${rule.judgedText} ${rule.unit}, ${rule.marginText}; permitted: ${rule.permittedText}`}
                />
              )}
            </td>
            <td className={`${outcomeTone(rule.outcome)} max-md:text-right`}>
              {rule.marginText}
              {rule.neededTolerance && (
                <span className="sr-only"> (the tolerance of measurement was needed)</span>
              )}
            </td>
            <td className="text-muted">{rule.permittedText}</td>
            <td className="text-[12.5px] text-muted max-md:text-right">{rule.breach}</td>
          </tr>
        ))}
      </tbody>
    </table>
  );
}
