// In: wishes about a port. Out: one that is free on loopback now.

import net from "node:net";
import { Complaint, systemCode } from "./complaint";

const LOOPBACK = "127.0.0.1";

/** Whether nothing listens on this loopback port. */
export function isFree(port: number): Promise<boolean> {
  return new Promise((resolve, reject) => {
    const server = net.createServer();
    server.once("error", (error) => {
      const code = systemCode(error);
      if (code === "EADDRINUSE") resolve(false);
      else if (code === "EACCES")
        reject(new Complaint(`Port ${port} may not be used by this user.`, "Choose a port above 1023: PORT=3100 npm start"));
      else reject(error);
    });
    server.listen({ port, host: LOOPBACK, exclusive: true }, () => server.close(() => resolve(true)));
  });
}

/** Any free loopback port. */
export function anyPort(): Promise<number> {
  return new Promise((resolve, reject) => {
    const server = net.createServer();
    server.once("error", reject);
    server.listen({ port: 0, host: LOOPBACK }, () => {
      const address = server.address();
      server.close(() => (address && typeof address === "object" ? resolve(address.port) : reject(new Error("no port"))));
    });
  });
}

/** The first wish that is free, otherwise any free port. */
export async function freePort(...wishes: readonly (number | undefined)[]): Promise<number> {
  for (const wish of wishes) {
    if (wish !== undefined && (await isFree(wish))) return wish;
  }
  return anyPort();
}

/** The port a person asked for by setting PORT: exactly that one or a complaint. */
export async function demandedPort(text: string): Promise<number> {
  const port = Number(text);
  if (!Number.isInteger(port) || port < 1 || port > 65535) {
    throw new Complaint(
      `PORT is "${text}", which is not a port number.`,
      "Give a whole number from 1024 to 65535, for example PORT=3100 npm start",
    );
  }
  if (!(await isFree(port))) {
    throw new Complaint(
      `Port ${port} (asked for with PORT) is already used by another program.`,
      `Stop that program, choose another port (PORT=${port + 1} npm start), or leave PORT out to get a free one.`,
    );
  }
  return port;
}
