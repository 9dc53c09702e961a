/** Our mark: a line that steps low first. */
export function Mark({ className = "" }: { className?: string }) {
  return (
    <svg width="25" height="16" viewBox="0 0 25 16" fill="none" aria-hidden="true" className={className}>
      <path d="M0 1.5H10.5V13.5H25" stroke="currentColor" strokeWidth="2" />
    </svg>
  );
}
