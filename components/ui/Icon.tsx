import type { ReactNode } from "react";

// The few shapes that double a colour or stand where the fonts have no glyph. Drawn on a 12 unit square, one stroke.

function Shape({ children, size = 12 }: { children: ReactNode; size?: number }) {
  return (
    <svg
      width={size}
      height={size}
      viewBox="0 0 12 12"
      fill="none"
      stroke="currentColor"
      strokeWidth="1.4"
      aria-hidden="true"
      className="inline-block shrink-0 align-[-0.06em]"
    >
      {children}
    </svg>
  );
}

export function Cross() {
  return (
    <Shape>
      <path d="M2 2 10 10M10 2 2 10" />
    </Shape>
  );
}

export function Tick() {
  return (
    <Shape>
      <path d="M1.5 6.5 4.5 9.5 10.5 2.5" />
    </Shape>
  );
}

/** A broken limit or another fault: an upright cross. */
export function FaultShape() {
  return (
    <Shape>
      <path d="M6 1V11M1 6H11" />
    </Shape>
  );
}

/** A contest: a triangle standing on its base. */
export function ContestShape() {
  return (
    <Shape>
      <path d="M6 1.5 10.8 10H1.2Z" />
    </Shape>
  );
}

/** Too close to call: a level line with a gap. */
export function UndecidedShape() {
  return (
    <Shape>
      <path d="M1 6H4.4M7.6 6H11" />
    </Shape>
  );
}

/** A tag: a short flag on its staff. */
export function TagShape() {
  return (
    <Shape>
      <path d="M2.5 11V1.5H9.5L7.5 4 9.5 6.5H2.5" />
    </Shape>
  );
}

export function ArrowRight() {
  return (
    <Shape>
      <path d="M1 6H11M7.5 2.5 11 6 7.5 9.5" />
    </Shape>
  );
}

/** Two arrows past each other: the two lines change places. */
export function SwapShape() {
  return (
    <Shape>
      <path d="M1 4H10M7.5 1.5 10 4M11 8H2M4.5 10.5 2 8" />
    </Shape>
  );
}
