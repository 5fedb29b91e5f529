/** Seconds of 'hh:mm:ss.mmm', 'mm:ss' or 'ss'; NaN for what is none. */
export function secondsOfTimecode(text: string): number {
  const parts = /^(?:(?:(\d{1,3}):)?(\d{1,2}):)?(\d{1,2}(?:[.,]\d{1,3})?)$/.exec(text.trim());
  if (!parts) return NaN;
  const [hours, minutes, seconds] = [parts[1] ?? '0', parts[2] ?? '0', parts[3].replace(',', '.')].map(
    Number,
  );
  if (minutes >= 60 || seconds >= 60) return NaN;
  return hours * 3600 + minutes * 60 + seconds;
}
