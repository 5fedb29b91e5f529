import { LoadLine } from '@/components/look/LoadLine.tsx';
import { outcomeTone, VerdictMark } from '@/components/look/VerdictMark.tsx';
import type { RuleVerdict, VerdictBody } from '@/domain/verdict.ts';

const worstFirst = { fail: 0, advisory: 1, not_judged: 2, pass: 3 };
const hasLine = (rule: RuleVerdict) => rule.metric !== null && rule.judged !== null;
/** What needs a person first; among equals, rules with a scale before facts. */
const inOrder = (rules: readonly RuleVerdict[]) =>
  [...rules].sort(
    (a, b) => worstFirst[a.outcome] - worstFirst[b.outcome] || Number(hasLine(b)) - Number(hasLine(a)),
  );

function RuleLine({ rule, width }: { rule: RuleVerdict; width: number }) {
  return (
    <LoadLine
      metric={rule.metric ?? ''}
      value={rule.judged}
      atLeast={rule.atLeast}
      atMost={rule.atMost}
      outcome={rule.outcome}
      size="row"
      width={width}
      label={`${rule.name} ${rule.judgedText} ${rule.unit}, ${rule.marginText}; permitted: ${rule.permittedText}`}
    />
  );
}

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
              {rule.judged !== null && rule.unit !== 's' && <span className="unit">{rule.unit}</span>}
            </td>
            <td className="py-2! max-md:order-last max-md:col-span-2 md:w-[430px]">
              {hasLine(rule) && (
                <>
                  <span className="hidden md:block">
                    <RuleLine rule={rule} width={390} />
                  </span>
                  {/* Drawn for the hand rather than shrunk, so that its numbers can be read. */}
                  <span className="md:hidden">
                    <RuleLine rule={rule} width={292} />
                  </span>
                </>
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
