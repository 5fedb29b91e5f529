import { renderToStaticMarkup } from 'react-dom/server';
import { describe, expect, it } from 'vitest';
import { FactsSheet } from '../../../src/components/report/FactsSheet.tsx';
import { passageAddress } from '../../../src/components/report/passage-address.ts';
import { figures, stereoFormat } from '../../factories/world.ts';

const measurement: React.ComponentProps<typeof FactsSheet>['measurement'] = {
  engineVersion: '2.0.0',
  format: stereoFormat,
  figures: figures({}),
  findings: [
    { code: 'drop-out', message: 'Drop-out of 10.0 ms in R.', atSeconds: 62.5, lengthSeconds: 0.01 },
    { code: 'dual-mono', message: 'Left and right are the same.' },
  ],
};
const sheet = (passageAt?: React.ComponentProps<typeof FactsSheet>['passageAt']) =>
  renderToStaticMarkup(
    <FactsSheet
      measurement={measurement}
      fileName="small-gales.wav"
      sha256={null}
      {...(passageAt && { passageAt })}
    />,
  );

describe('findings on the facts sheet', () => {
  it('lead to their place in the passage', () => {
    const html = sheet((stretch) => passageAddress('?channel=one', stretch));
    expect(html).toContain('href="?channel=one&amp;t=57.50-67.51"');
    expect(html.match(/<a /g)).toHaveLength(1);
  });

  it('only tell their time where no passage is shown', () => {
    const html = sheet();
    expect(html).not.toContain('<a ');
    expect(html).toContain('00:01:02.500');
  });
});
