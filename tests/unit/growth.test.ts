import { afterEach, beforeEach, expect, test, vi } from "vitest";
import { Growth } from "@/components/bench/growth";

beforeEach(() => {
  vi.useFakeTimers();
});
afterEach(() => {
  vi.useRealTimers();
});

/** Asks with numbered calls and notes which were run. */
function asked(growth: Growth) {
  const ran: number[] = [];
  let number = 0;
  const ask = () => {
    const own = number++;
    growth.ask(() => {
      ran.push(own);
      return undefined;
    });
  };
  return { ran, ask };
}

test("tells at once the first time, of many calls in a row the newest", () => {
  const { ran, ask } = asked(new Growth());
  ask();
  ask();
  vi.advanceTimersByTime(0);
  expect(ran).toEqual([1]);
});

test("waits until the page has shown it, however long that takes, and loses no last call", () => {
  const growth = new Growth();
  const { ran, ask } = asked(growth);
  ask();
  vi.advanceTimersByTime(0);
  ask();
  ask();
  vi.advanceTimersByTime(10_000);
  expect(ran).toEqual([0]);
  growth.shown();
  vi.advanceTimersByTime(0);
  expect(ran).toEqual([0, 2]);
});

test("leaves time between two tellings once the first rows are there", () => {
  const growth = new Growth();
  const { ran, ask } = asked(growth);
  for (let round = 0; round < 2; round++) {
    ask();
    vi.advanceTimersByTime(0);
    growth.shown();
  }
  ask();
  vi.advanceTimersByTime(99);
  expect(ran).toEqual([0, 1]);
  vi.advanceTimersByTime(1);
  expect(ran).toEqual([0, 1, 2]);
});

test("keeps its pace after a pause, and goes on when asked again", () => {
  const growth = new Growth();
  const { ran, ask } = asked(growth);
  ask();
  vi.advanceTimersByTime(0);
  growth.shown();
  vi.advanceTimersByTime(500);
  ask();
  vi.advanceTimersByTime(0);
  expect(ran).toEqual([0, 1]);
});

test("tells nothing once closed", () => {
  const growth = new Growth();
  const { ran, ask } = asked(growth);
  ask();
  growth.close();
  ask();
  growth.shown();
  vi.advanceTimersByTime(1000);
  expect(ran).toEqual([]);
});

test("says once what it drew is shown, so that nothing is drawn a second time", () => {
  const growth = new Growth();
  let taken = 0;
  growth.ask(() => () => {
    taken++;
  });
  vi.runOnlyPendingTimers();
  expect(taken).toBe(0);
  growth.shown();
  expect(taken).toBe(1);
});
