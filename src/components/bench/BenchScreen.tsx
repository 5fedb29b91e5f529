import { useMemo, useState } from 'react';
import { ApiProvider } from '@/components/live/ApiProvider.tsx';
import { Bench } from './Bench.tsx';
import { publishedSpecs, type BenchSpec } from './bench-specs.ts';
import type { BenchRow } from './columns.tsx';
import { UploadDialog } from './UploadDialog.tsx';
import { useHandover } from './use-handover.ts';

interface Props {
  /** Those in force that the organisation may see. */
  specs: BenchSpec[];
  channels: { id: string; name: string }[];
  programmes: string[];
  search: string;
}

/** The bench of a mix engineer: against the channels' specs too, with the way to the service. */
export default function BenchScreen(props: Props) {
  return (
    <ApiProvider>
      <Screen {...props} />
    </ApiProvider>
  );
}

function Screen({ specs: own, channels, programmes, search }: Props) {
  const specs = useMemo(() => [...own, ...publishedSpecs], [own]);
  const { handOver, of } = useHandover(programmes);
  const [offered, setOffered] = useState<{ rows: BenchRow[]; whenTaken: () => void } | null>(null);
  return (
    <>
      <Bench
        specs={specs}
        search={search}
        handover={{ offer: (rows, whenTaken) => setOffered({ rows, whenTaken }), of }}
      />
      {offered && (
        <UploadDialog
          rows={offered.rows}
          channels={channels}
          onClose={() => setOffered(null)}
          onUpload={(channelIds) => {
            setOffered(null);
            offered.whenTaken();
            handOver(
              offered.rows.map(({ item }) => item),
              channelIds,
            );
          }}
        />
      )}
    </>
  );
}
