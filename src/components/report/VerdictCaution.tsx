/** What stands beside every verdict. */
export function VerdictCaution() {
  return (
    <p className="text-[12.5px] text-muted">
      A pass here is a measurement against the rules entered, not a broadcaster's acceptance nor legal advice;
      the receiving party's own spec and national broadcast-loudness law prevail.
    </p>
  );
}
