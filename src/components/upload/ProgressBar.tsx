interface Props {
  done: number;
  all: number;
  /** What the bar is of: 'gales_211.wav, sent'. */
  label: string;
}

/** How much of something is done: water rising along a thin line. */
export function ProgressBar({ done, all, label }: Props) {
  const percent = all > 0 ? Math.min(100, (done / all) * 100) : 0;
  return (
    <div
      role="progressbar"
      aria-label={label}
      aria-valuemin={0}
      aria-valuemax={100}
      aria-valuenow={Math.round(percent)}
      className="h-1.5 w-full border-b border-muted"
    >
      <div className="h-full bg-teal" style={{ width: `${percent}%` }} />
    </div>
  );
}
