/** The hatches that double a colour. Once per page; drawings refer to them by id. */
export function Patterns() {
  return (
    <svg width="0" height="0" aria-hidden="true" className="absolute">
      <defs>
        <pattern id="contest-hatch" width="5" height="5" patternUnits="userSpaceOnUse" patternTransform="rotate(45)">
          <path d="M0 0V5" className="stroke-contest" strokeWidth="1.2" opacity="0.6" />
        </pattern>
        <pattern id="evidence-hatch" width="4.5" height="4.5" patternUnits="userSpaceOnUse" patternTransform="rotate(45)">
          <path d="M0 0V4.5" className="stroke-contest" strokeWidth="2.2" />
        </pattern>
      </defs>
    </svg>
  );
}
