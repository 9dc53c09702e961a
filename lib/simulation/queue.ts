// In: instants with something to do. Out: the same, in order of time, then of arrival. A binary heap.

export interface Appointment {
  readonly at: number;
  readonly order: number;
  run: (() => void) | null;
}

export class Queue {
  private readonly heap: Appointment[] = [];
  private order = 0;

  add(at: number, run: () => void): Appointment {
    const entry = { at, order: this.order++, run };
    const heap = this.heap;
    let i = heap.length;
    heap.push(entry);
    while (i > 0) {
      const parent = (i - 1) >> 1;
      if (before(heap[parent], entry)) break;
      heap[i] = heap[parent];
      i = parent;
    }
    heap[i] = entry;
    return entry;
  }

  /** Time of the next entry, Infinity when there is none. */
  peek(): number {
    return this.heap.length > 0 ? this.heap[0].at : Number.POSITIVE_INFINITY;
  }

  take(): Appointment | undefined {
    const heap = this.heap;
    const first = heap[0];
    const last = heap.pop();
    if (last === undefined || heap.length === 0) return first;
    let i = 0;
    for (;;) {
      let child = 2 * i + 1;
      if (child >= heap.length) break;
      if (child + 1 < heap.length && before(heap[child + 1], heap[child])) child++;
      if (before(last, heap[child])) break;
      heap[i] = heap[child];
      i = child;
    }
    heap[i] = last;
    return first;
  }
}

function before(a: Appointment, b: Appointment): boolean {
  return a.at < b.at || (a.at === b.at && a.order < b.order);
}
