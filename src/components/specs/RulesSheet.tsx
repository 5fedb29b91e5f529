import { LoadLine } from '@/components/look/LoadLine.tsx';
import { formatLimit } from '@/domain/figures-text.ts';
import { limitsOf, permittedText, ruleName } from '@/domain/rule-words.ts';
import { monoText, roundingText } from '@/domain/spec-changes.ts';
import type { Rule, SpecBody } from '@/domain/spec.ts';

const metricOf = (rule: Rule): string | null =>
  rule.kind === 'integrated' ? 'integratedLufs' : rule.kind === 'limits' ? rule.metric : null;

function Recess({ rule, unit, width }: { rule: Rule; unit: SpecBody['unit']; width: number }) {
  const metric = metricOf(rule);
  return (
    metric && (
      <LoadLine
        metric={metric}
        value={null}
        {...limitsOf(rule)}
        outcome="not_judged"
        size="row"
        width={width}
        label={`${ruleName(rule)}: ${permittedText(rule, unit)}`}
      />
    )
  );
}

/** A version's rules as they are judged: each with what it permits, drawn and in words, and what a breach means. */
export function RulesSheet({ body }: { body: SpecBody }) {
  return (
    <div className="grid gap-4">
      <table className="rows" aria-label="Rules">
        <thead className="max-md:sr-only">
          <tr>
            {['Rule', 'Permitted', 'Load line', 'A breach', 'Measurement tolerance'].map((name) => (
              <th key={name} scope="col">
                {name}
              </th>
            ))}
          </tr>
        </thead>
        <tbody>
          {body.rules.map((rule) => (
            <tr
              key={rule.id}
              className="max-md:grid max-md:border-b max-md:border-hairline max-md:py-2 max-md:[&>td]:h-auto max-md:[&>td]:border-0 max-md:[&>td]:px-0 max-md:[&>td]:py-0.5"
            >
              <td className="font-medium">{ruleName(rule)}</td>
              <td className="num">
                {permittedText(rule, body.unit)}
                {rule.kind === 'limits' && rule.judgeShortProgrammes && ', also under 60 s'}
              </td>
              <td className="py-1.5! max-md:empty:hidden md:w-[330px]">
                <Recess rule={rule} unit={body.unit} width={300} />
              </td>
              <td>
                <span className="md:hidden">a breach </span>
                {rule.breach === 'reject' ? 'rejects' : 'advises'}
              </td>
              <td className="num text-muted">
                {rule.measurementTolerance > 0 ? (
                  <>
                    <span className="md:hidden">measurement tolerance </span>
                    {formatLimit(rule.measurementTolerance)}
                  </>
                ) : (
                  <span className="max-md:hidden">off</span>
                )}
              </td>
            </tr>
          ))}
        </tbody>
      </table>
      <p className="text-muted">
        Rules judge {roundingText[body.rounding]}. One-channel files are judged {monoText[body.mono]}. A file
        that is cut short is rejected, and other findings about its integrity are advised, unless a rule says
        otherwise.
      </p>
    </div>
  );
}
