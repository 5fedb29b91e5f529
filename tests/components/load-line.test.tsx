// @vitest-environment jsdom
import { cleanup, fireEvent, render, screen } from '@testing-library/react';
import { useState } from 'react';
import { afterEach, describe, expect, it } from 'vitest';
import { LoadLine } from '@/components/look/LoadLine.tsx';
import { LoadLineEditor } from '@/components/look/LoadLineEditor.tsx';
import { placeOn, scaleOf, type Limits } from '@/components/look/load-line-scale.ts';
import { VerdictMark } from '@/components/look/VerdictMark.tsx';

afterEach(cleanup);

const drawn = (given: Partial<Parameters<typeof LoadLine>[0]>) => {
  const { container } = render(
    <LoadLine
      metric="truePeakDbtp"
      value={-3}
      atLeast={null}
      atMost={-1}
      outcome="pass"
      size="cell"
      label="Maximum true peak"
      {...given}
    />,
  );
  return {
    water: container.querySelectorAll('.fill-water').length,
    hatched: container.querySelectorAll('pattern').length,
    svg: container.querySelector('svg') as SVGSVGElement,
    paths: [...container.querySelectorAll('path')].map((path) => path.getAttribute('d') ?? ''),
  };
};

describe('the load line', () => {
  it('holds water and no hatching while the value is inside', () => {
    expect(drawn({})).toMatchObject({ water: 1, hatched: 0 });
  });

  it('is dry and hatched once the value is beyond, whatever a breach means', () => {
    for (const outcome of ['fail', 'advisory'] as const)
      expect(drawn({ value: 0.3, outcome })).toMatchObject({ water: 0, hatched: 1 });
  });

  it('counts a value on the limit as inside', () => {
    expect(drawn({ value: -1 })).toMatchObject({ water: 1, hatched: 0 });
  });

  it('is red where the delivery is refused and brass where a breach only advises', () => {
    expect(drawn({ value: 0.3, outcome: 'fail' }).svg.getAttribute('class')).toContain('text-hull');
    expect(drawn({ value: 0.3, outcome: 'advisory' }).svg.getAttribute('class')).toContain('text-brass');
    expect(drawn({}).svg.getAttribute('class')).toContain('text-ink');
  });

  it('carries a chevron only when the value is off the scale', () => {
    const lines = (value: number) => drawn({ value, outcome: 'fail' }).paths.length;
    expect(lines(40)).toBe(lines(0.3) + 1);
  });

  it('hangs the bob lower inside than beyond', () => {
    const tip = (value: number, outcome: 'pass' | 'fail') =>
      Number(
        /V([\d.]+)$/.exec(drawn({ value, outcome }).paths.find((d) => /^M[\d.]+ 0V/.test(d)) ?? '')?.[1],
      );
    expect(tip(-3, 'pass')).toBeGreaterThan(tip(0.3, 'fail'));
  });

  it('is told as text', () => {
    drawn({ label: 'Maximum true peak 0.3 dBTP, 1.3 dB over' });
    expect(screen.getByRole('img', { name: 'Maximum true peak 0.3 dBTP, 1.3 dB over' })).toBeTruthy();
  });
});

describe('its scale', () => {
  it('depends on the limits only, so that rows under one spec can be compared', () => {
    const limits = { atLeast: -23.5, atMost: -22.5 };
    const { min, max } = scaleOf('integratedLufs', limits, 'cell');
    expect(min).toBeLessThan(-23.5);
    expect(max).toBeGreaterThan(-22.5);
    expect((min + max) / 2).toBeCloseTo(-23, 9);
  });

  it('never shows a range or a duration under 0', () => {
    expect(scaleOf('rangeLu', { atLeast: null, atMost: 5 }, 'row').min).toBe(0);
    expect(scaleOf('durationSeconds', { atLeast: 30, atMost: 31 }, 'row').min).toBeGreaterThanOrEqual(0);
  });

  it('writes both limits where there is room for two labels', () => {
    expect(scaleOf('integratedLufs', { atLeast: -23.5, atMost: -22.5 }, 'row').ticks).toEqual(
      expect.arrayContaining([-23.5, -22.5]),
    );
  });

  it('keeps what is off it within the drawing, short of the chevron', () => {
    const scale = { min: -10, max: 0, ticks: [] };
    expect(placeOn(scale, 20, 84)).toBe(75);
    expect(placeOn(scale, -99, 84)).toBe(9);
    expect(placeOn(scale, -5, 84)).toBe(42);
  });
});

describe('the load line as an editor', () => {
  function Held({ start, onChange }: { start: Limits; onChange?: (limits: Limits) => void }) {
    const [limits, setLimits] = useState(start);
    return (
      <LoadLineEditor
        metric="integratedLufs"
        unit="LUFS"
        label="Integrated loudness"
        {...limits}
        onChange={(next) => {
          setLimits(next);
          onChange?.(next);
        }}
      />
    );
  }
  const slider = (name: string) => screen.getByRole('slider', { name: `Integrated loudness, ${name}` });
  const value = (name: string) => slider(name).getAttribute('aria-valuenow');

  it('moves a wall by a tenth with an arrow key and by one with Page Up', () => {
    render(<Held start={{ atLeast: -23.5, atMost: -22.5 }} />);
    fireEvent.keyDown(slider('at most'), { key: 'ArrowRight' });
    expect(value('at most')).toBe('-22.4');
    fireEvent.keyDown(slider('at most'), { key: 'PageUp' });
    expect(value('at most')).toBe('-21.4');
    expect(value('at least')).toBe('-23.5');
    expect(slider('at most').getAttribute('aria-valuetext')).toBe('\u221221.4 LUFS');
  });

  it('stops a wall at the other one instead of crossing it', () => {
    render(<Held start={{ atLeast: -23.1, atMost: -23 }} />);
    fireEvent.keyDown(slider('at least'), { key: 'PageUp' });
    expect([value('at least'), value('at most')]).toEqual(['-23', '-23']);
  });

  it('does not drift: a hundred steps up and down end where they began', () => {
    render(<Held start={{ atLeast: -23.5, atMost: -22.5 }} />);
    for (let i = 0; i < 100; i++) fireEvent.keyDown(slider('at most'), { key: 'ArrowUp' });
    for (let i = 0; i < 100; i++) fireEvent.keyDown(slider('at most'), { key: 'ArrowDown' });
    expect(value('at most')).toBe('-22.5');
  });

  it('leaves an open side open', () => {
    const seen: Limits[] = [];
    render(<Held start={{ atLeast: null, atMost: -18 }} onChange={(limits) => seen.push(limits)} />);
    expect(screen.getAllByRole('slider')).toHaveLength(1);
    fireEvent.keyDown(slider('at most'), { key: 'ArrowLeft' });
    expect(seen).toEqual([{ atLeast: null, atMost: -18.1 }]);
  });
});

describe('a verdict', () => {
  it('has a shape of its own for each outcome, so that it reads without colour', () => {
    const shapes = (['pass', 'advisory', 'fail', 'not_judged'] as const).map((outcome) => {
      const { container, unmount } = render(<VerdictMark outcome={outcome} />);
      const shape = container.querySelector('path')?.getAttribute('d');
      unmount();
      return shape;
    });
    expect(new Set(shapes).size).toBe(4);
  });

  it('keeps its word for those who do not see the shape', () => {
    render(<VerdictMark outcome="fail" wordless />);
    expect(screen.getByText('Fail')).toBeTruthy();
  });
});
