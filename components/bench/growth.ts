/** The page is told of growth at once the first two times (the head, the first rows), then so long after it has shown the last. */
const PACE_MS = 100;

/** Has the page draw; may answer what is to be called once it has. */
type Act = () => (() => void) | undefined;

/** Runs one of many calls now and then, the last one never lost, none before the page has shown the one before, none once closed. */
export class Growth {
  #timer: ReturnType<typeof setTimeout> | undefined;
  #drawing = false;
  #shown = 0;
  #next: Act | null = null;
  #drawn: (() => void) | null = null;
  #closed = false;

  ask(act: Act): void {
    this.#next = act;
    if (!this.#drawing && this.#timer === undefined) this.#wait(0);
  }

  /** The page shows what it was told. */
  shown(): void {
    if (!this.#drawing) return;
    this.#drawing = false;
    this.#drawn?.();
    this.#shown += 1;
    this.#wait(this.#shown === 1 ? 0 : PACE_MS);
  }

  close(): void {
    this.#closed = true;
    clearTimeout(this.#timer);
    this.#drawn?.();
  }

  #wait(ms: number): void {
    if (this.#closed) return;
    this.#timer = setTimeout(() => {
      this.#timer = undefined;
      const act = this.#next;
      this.#next = null;
      if (act === null) return;
      this.#drawing = true;
      this.#drawn = act() ?? null;
    }, ms);
  }
}
