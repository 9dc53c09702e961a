// In: names of Debian packages. Out: the packages installed, or the exact line for somebody who may install them.

import { access, mkdir, writeFile } from "node:fs/promises";
import path from "node:path";
import { Complaint } from "./complaint";
import { run } from "./process";

const INSTALL = ["install", "-y", "--no-install-recommends", "-o", "Dpkg::Options::=--force-confold"];

export function isRoot(): boolean {
  return process.getuid?.() === 0;
}

/** Full path of a program on PATH, or undefined. */
export async function findProgram(name: string): Promise<string | undefined> {
  const folders = [...(process.env.PATH ?? "").split(path.delimiter), "/usr/bin", "/usr/sbin", "/usr/local/bin"];
  for (const folder of folders.filter(Boolean)) {
    const file = path.join(folder, name);
    if (await exists(file)) return file;
  }
  return undefined;
}

export async function exists(file: string): Promise<boolean> {
  return access(file).then(
    () => true,
    () => false,
  );
}

/** Installs packages as root through apt; for anyone else, and where there is no apt, complains with the line to run. */
export async function install(packages: readonly string[], purpose: string): Promise<void> {
  const line = `apt-get update && apt-get install -y --no-install-recommends ${packages.join(" ")}`;
  const apt = await findProgram("apt-get");
  if (!apt) {
    throw new Complaint(
      `${purpose} is missing, and this system has no apt to install it with.`,
      `Install what Debian calls: ${packages.join(", ")}.`,
    );
  }
  if (!isRoot()) {
    throw new Complaint(
      `${purpose} is missing, and only root may install it.`,
      `Run this once, then start again:\n\n  sudo sh -c '${line}'\n`,
    );
  }
  console.log(`Installing ${packages.join(", ")} from Debian (${purpose}) ...`);
  if (packages.includes("postgresql")) await declineMainCluster();
  const env = { ...process.env, DEBIAN_FRONTEND: "noninteractive" };
  const update = await run({ name: "apt-get update", file: apt, args: ["update"], env, limit: 300_000 });
  const installed = await run({ name: "apt-get install", file: apt, args: [...INSTALL, ...packages], env, limit: 900_000 });
  if (installed.code === 0) return;
  const said = `${update.code === 0 ? "" : update.output}\n${installed.output}`.trim().split("\n").slice(-12).join("\n");
  throw new Complaint(
    `${purpose} could not be installed:\n${said}`,
    `Put that right, then start again, or run it by hand:\n\n  ${line}\n`,
  );
}

/** Keeps Debian from starting a cluster of its own, which nobody here asked for. An existing file is somebody's decision. */
async function declineMainCluster(): Promise<void> {
  const file = "/etc/postgresql-common/createcluster.conf";
  if (await exists(file)) return;
  await mkdir(path.dirname(file), { recursive: true });
  await writeFile(file, "create_main_cluster = false\n");
}
