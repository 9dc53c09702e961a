/** The page is told of growth at once the first time, then so long after it has shown the last: reading is not to be slowed. */
const PACE_MS = 100;

/** Runs one of many calls now and then, the last one never lost, none before the page has shown the one before, none once closed. */
export class Growth {
  #timer: ReturnType<typeof setTimeout> | undefined;
  #drawing = false;
  #next: (() => void) | null = null;
  #closed = false;

  ask(act: () => void): void {
    this.#next = act;
    if (!this.#drawing && this.#timer === undefined) this.#wait(0);
  }

  /** The page shows what it was told. */
  shown(): void {
    if (!this.#drawing) return;
    this.#drawing = false;
    this.#wait(PACE_MS);
  }

  close(): void {
    this.#closed = true;
    clearTimeout(this.#timer);
  }

  #wait(ms: number): void {
    if (this.#closed) return;
    this.#timer = setTimeout(() => {
      this.#timer = undefined;
      const act = this.#next;
      this.#next = null;
      if (act === null) return;
      this.#drawing = true;
      act();
    }, ms);
  }
}
