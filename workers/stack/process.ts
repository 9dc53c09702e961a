// In: a command line. Out: a child process in a group of its own, so that ending it ends everything below it and nothing else.

import { type ChildProcess, spawn } from "node:child_process";
import { createWriteStream } from "node:fs";
import { mkdir, readFile } from "node:fs/promises";
import path from "node:path";
import { Complaint } from "./complaint";

export interface Command {
  readonly name: string;
  readonly file: string;
  readonly args: readonly string[];
  readonly env?: NodeJS.ProcessEnv;
  readonly cwd?: string;
  /** Milliseconds after which the whole group is ended; the result then has `timedOut`. */
  readonly limit?: number;
  /** Show the output as it comes; otherwise it is only kept for the result. */
  readonly show?: boolean;
  /** Give the child no pipes at all: for programs that leave a daemon behind, which would hold the pipe open. */
  readonly silent?: boolean;
}

export interface Outcome {
  readonly code: number;
  readonly timedOut: boolean;
  /** Standard output and standard error as they came, at most the last 4 MB. */
  readonly output: string;
}

const KEPT_OUTPUT = 4_000_000;
const GRACE = 8_000;
const running = new Map<number, ChildProcess>();

/** Runs a command to its end. Never throws for a non-zero exit code; throws a Complaint when the program does not exist. */
export async function run(command: Command): Promise<Outcome> {
  const child = launch(command, command.silent ? "ignore" : "pipe");
  let output = "";
  for (const stream of [child.stdout, child.stderr]) {
    stream?.setEncoding("utf8").on("data", (text: string) => {
      output = (output + text).slice(-KEPT_OUTPUT);
      if (command.show) process.stdout.write(text);
    });
  }
  let timedOut = false;
  const timer = command.limit
    ? setTimeout(() => {
        timedOut = true;
        void end(child);
      }, command.limit)
    : undefined;
  const code = await exit(child, command, command.silent ? "exit" : "close");
  clearTimeout(timer);
  return { code, timedOut, output };
}

export interface Service {
  readonly pid: number;
  readonly process: ChildProcess;
  /** Ends the service and everything it started; resolves when it is gone. */
  stop(): Promise<void>;
}

/** Starts a command that keeps running; its output goes to a log file, its errors also to the terminal. */
export async function serve(command: Command, log: string): Promise<Service> {
  await mkdir(path.dirname(log), { recursive: true });
  const file = createWriteStream(log, { flags: "w" });
  const child = launch(command, "pipe");
  const gone = exit(child, command, "close");
  child.stdout?.pipe(file, { end: false });
  child.stderr?.on("data", (data: Buffer) => {
    file.write(data);
    process.stderr.write(data);
  });
  gone.then(
    () => file.end(),
    () => file.end(),
  );
  if (child.pid === undefined) {
    await gone;
    throw new Error(`${command.name} has no process id`);
  }
  return { pid: child.pid, process: child, stop: () => end(child) };
}

function launch(command: Command, pipes: "pipe" | "ignore"): ChildProcess {
  const child = spawn(command.file, command.args, {
    cwd: command.cwd,
    env: command.env ?? process.env,
    stdio: ["ignore", pipes, pipes],
    detached: true,
  });
  const pid = child.pid;
  if (pid !== undefined) {
    running.set(pid, child);
    child.on("exit", () => running.delete(pid));
  }
  return child;
}

function exit(child: ChildProcess, command: Command, event: "exit" | "close"): Promise<number> {
  return new Promise((resolve, reject) => {
    child.on("error", (error) => {
      reject(
        new Complaint(
          `${command.name} could not be started: ${error.message}.`,
          `Check that ${command.file} is installed and may be run.`,
        ),
      );
    });
    child.on(event, (code, signal) => resolve(code ?? (signal ? 128 : 1)));
  });
}

/** Asks the child's group to end, insists after a grace period, and waits until the child is gone. */
async function end(child: ChildProcess): Promise<void> {
  if (child.pid === undefined || child.exitCode !== null || child.signalCode !== null) return;
  const pid = child.pid;
  const gone = new Promise<void>((resolve) => child.once("exit", () => resolve()));
  signalGroup(pid, "SIGTERM");
  const timer = setTimeout(() => signalGroup(pid, "SIGKILL"), GRACE);
  await gone;
  clearTimeout(timer);
  // What the child itself started and did not end.
  signalGroup(pid, "SIGKILL");
}

function signalGroup(pid: number, signal: NodeJS.Signals): void {
  try {
    process.kill(-pid, signal);
  } catch {
    // The group is already gone.
  }
}

/** Ends every child still running, for the last moment of this process. */
export async function endAll(): Promise<void> {
  await Promise.all([...running.values()].map(end));
}

/** When a process started, in clock ticks since boot, so that a reused process id is not taken for the old one. */
export async function birth(pid: number): Promise<string | undefined> {
  try {
    const stat = await readFile(`/proc/${pid}/stat`, "utf8");
    // "123 (node) S 1 ..." the name may hold spaces and brackets, so count fields after the last one; the start is field 22.
    const fields = stat.slice(stat.lastIndexOf(")") + 2).split(" ");
    // A process that ended and was not collected yet is not there any more.
    return fields[0] === "Z" ? undefined : fields[19];
  } catch {
    return alive(pid) ? "unknown" : undefined;
  }
}

function alive(pid: number): boolean {
  try {
    process.kill(pid, 0);
    return true;
  } catch (error) {
    return error instanceof Error && "code" in error && error.code === "EPERM";
  }
}

/** Ends a process group that an earlier run of this checkout left behind, if it still is that process. */
export async function endLeftover(pid: number, born: string): Promise<boolean> {
  if (born === "unknown" || (await birth(pid)) !== born) return false;
  signalGroup(pid, "SIGTERM");
  for (let waited = 0; waited < GRACE && (await birth(pid)) === born; waited += 100) {
    await new Promise((resolve) => setTimeout(resolve, 100));
  }
  if ((await birth(pid)) === born) signalGroup(pid, "SIGKILL");
  return true;
}
