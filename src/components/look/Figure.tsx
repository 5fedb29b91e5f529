import { formatLevel } from '@/domain/figures-text.ts';

interface Props {
  value: number | null | undefined;
  unit?: string;
  decimals?: number;
  /** 'large' in a report's rows. */
  size?: 'cell' | 'large';
}

/** A figure with its unit in small text; what does not exist is a dash that says so. */
export function Figure({ value, unit, decimals = 1, size = 'cell' }: Props) {
  if (value === null || value === undefined)
    return (
      <span className="num text-muted">
        <span aria-hidden="true">–</span>
        <span className="sr-only">no value</span>
      </span>
    );
  return (
    <span className={`num whitespace-nowrap ${size === 'large' ? 'text-[17px] font-semibold' : ''}`}>
      {formatLevel(value, decimals)}
      {unit && <span className={`unit ${size === 'large' ? 'text-[12px]! font-normal' : ''}`}>{unit}</span>}
    </span>
  );
}
