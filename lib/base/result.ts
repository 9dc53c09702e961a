// In: nothing. Out: the way every stage says "this input cannot be used" without throwing.
// Throwing is kept for broken promises of our own code.

/** Where in the input a problem stands. `line` and `column` count from 1, `byte` from 0. */
export interface Place {
  readonly line?: number;
  readonly column?: number;
  readonly byte?: number;
}

/**
 * Bad input. `message` is one sentence saying what is wrong and where; `advice` says what to do about it.
 * `code` is stable and kebab-case; programs test the code, people read the sentences.
 */
export interface Problem {
  readonly code: string;
  readonly message: string;
  readonly advice: string;
  readonly place: Place;
}

export type Result<T, E = Problem> = { readonly ok: true; readonly value: T } | { readonly ok: false; readonly problem: E };

export function ok<T>(value: T): { readonly ok: true; readonly value: T } {
  return { ok: true, value };
}

export function refuse<E = Problem>(problem: E): { readonly ok: false; readonly problem: E } {
  return { ok: false, problem };
}

/** Something the reader had to assume or set aside; shown to the person, never silent. */
export interface Warning {
  readonly code: string;
  readonly message: string;
  readonly line?: number;
  readonly count?: number;
}

/** Marks a switch as exhaustive; reaching it is our own fault. */
export function unreachable(value: never): never {
  throw new Error(`unreachable case: ${JSON.stringify(value)}`);
}
