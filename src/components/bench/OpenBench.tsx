import { Bench } from './Bench.tsx';
import { publishedSpecs } from './bench-specs.ts';

/** The bench of a visitor: against published documents, and with nowhere to send anything. */
export default function OpenBench({ search }: { search: string }) {
  return <Bench specs={publishedSpecs} search={search} />;
}
