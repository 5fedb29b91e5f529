import { formatLimit } from '@/domain/figures-text.ts';
import { permittedText, ruleName } from '@/domain/rule-words.ts';
import type { BenchSpec } from './bench-specs.ts';

/** Before there is a file: what it will be held against. */
export function SpecsAhead({ specs }: { specs: readonly BenchSpec[] }) {
  return (
    <section className="mt-8">
      <h2 className="mb-1 text-[13px] font-semibold">What a file is held against</h2>
      <ul className="grid border-t border-ink sm:grid-cols-2 sm:gap-x-5 lg:grid-cols-3">
        {specs.map(({ id, name, by, use, published, body }) => (
          <li key={id} className="border-b border-hairline py-2">
            <p className="font-semibold">{name}</p>
            <p className="text-[12.5px] text-muted">
              {published ? use : [by, use].filter(Boolean).join('; ')}
            </p>
            <p className="mt-0.5 text-[13px]">
              {body.rules.map((rule) => (
                <span key={rule.id} className="block">
                  <span className="text-muted">{ruleName(rule)}</span>{' '}
                  <span className="num whitespace-nowrap">{permittedText(rule, body.unit)}</span>
                  {rule.measurementTolerance > 0 && (
                    <span className="text-[12.5px] text-muted">
                      , and {formatLimit(rule.measurementTolerance)} for measurement
                    </span>
                  )}
                </span>
              ))}
            </p>
          </li>
        ))}
      </ul>
    </section>
  );
}
