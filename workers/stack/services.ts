// In: the environment and a data folder. Out: database, storage and mail: each the one that a setting names, else our own on loopback.

import { mkdir } from "node:fs/promises";
import path from "node:path";
import { type Cluster, openCluster } from "./cluster";
import { Complaint } from "./complaint";
import { type Mailbox, startMailbox } from "./mailbox";
import { freePort } from "./port";
import type { State } from "./state";
import { type Storage, startStorage } from "./storage";

type Settings = Record<string, string>;

export interface ServicesWish {
  readonly home: string;
  /** Ports and keys of last time; changed to those of now. */
  readonly state: State;
  /** Origins of the application's pages. */
  readonly origins: readonly string[];
  readonly environment: NodeJS.ProcessEnv;
  /** False for tests only. */
  readonly durable: boolean;
  /** For tests only: lets a test plan storage faults. */
  readonly controls?: boolean;
}

export interface Services {
  /** The settings that the application and its commands read. */
  readonly settings: Settings;
  readonly cluster?: Cluster;
  readonly storage?: Storage;
  readonly mailbox?: Mailbox;
  stop(): Promise<void>;
}

const DATABASE = "firstlow";
const BUCKET = "firstlow";
const ACCESS_KEY = "firstlow-local";

/** Starts what no setting replaces. When one fails, those already started are stopped again. */
export async function startServices(wish: ServicesWish): Promise<Services> {
  const stops: (() => Promise<void>)[] = [];
  const stop = async () => {
    for (const each of stops.splice(0).reverse()) await each();
  };
  try {
    const given = pick(wish.environment, ["DATABASE_URL", "S3_ENDPOINT", "SMTP_URL"]);
    checkStorageSettings(wish.environment);
    if (given.SMTP_URL && !wish.environment.MAIL_FROM) {
      throw new Complaint(
        "SMTP_URL is set, but MAIL_FROM is not.",
        'Give the sender of all mail, for example MAIL_FROM="Firstlow <firstlow@example.org>".',
      );
    }
    await mkdir(wish.home, { recursive: true });
    const cluster = given.DATABASE_URL ? undefined : await ownCluster(wish);
    if (cluster) stops.push(cluster.stop);
    const storage = given.S3_ENDPOINT ? undefined : await ownStorage(wish);
    if (storage) stops.push(storage.stop);
    const mailbox = given.SMTP_URL ? undefined : await ownMailbox(wish);
    if (mailbox) stops.push(mailbox.stop);
    const settings: Settings = {
      ...given,
      ...(cluster && { DATABASE_URL: cluster.url(DATABASE) }),
      ...(storage ? storageSettings(wish.state, storage.endpoint) : pick(wish.environment, STORAGE_SETTINGS)),
      ...(mailbox && { SMTP_URL: mailbox.url }),
      MAIL_FROM: wish.environment.MAIL_FROM || "Firstlow <firstlow@localhost.localdomain>",
    };
    return { settings, cluster, storage, mailbox, stop };
  } catch (error) {
    await stop();
    throw error;
  }
}

async function ownCluster(wish: ServicesWish): Promise<Cluster> {
  const { state, durable } = wish;
  const cluster = await openCluster({ folder: path.join(wish.home, "postgres"), port: state.databasePort, durable });
  try {
    state.databasePort = cluster.port;
    await cluster.createDatabase(DATABASE);
    return cluster;
  } catch (error) {
    await cluster.stop();
    throw error;
  }
}

async function ownStorage({ home, state, origins, controls }: ServicesWish): Promise<Storage> {
  state.storagePort = await freePort(state.storagePort);
  const { S3_ACCESS_KEY, S3_SECRET_KEY, S3_REGION } = storageSettings(state, "");
  const keys = { accessKey: S3_ACCESS_KEY, secretKey: S3_SECRET_KEY, region: S3_REGION };
  return startStorage({
    ...keys,
    folder: path.join(home, "storage"),
    port: state.storagePort,
    bucket: BUCKET,
    origins,
    controls,
  });
}

async function ownMailbox({ home, state }: ServicesWish): Promise<Mailbox> {
  state.mailPort = await freePort(state.mailPort);
  state.mailboxPort = await freePort(state.mailboxPort);
  return startMailbox({ folder: path.join(home, "mail"), smtpPort: state.mailPort, webPort: state.mailboxPort });
}

function storageSettings(state: State, endpoint: string): Settings {
  return {
    S3_ENDPOINT: endpoint,
    S3_BUCKET: BUCKET,
    S3_REGION: "us-east-1",
    S3_ACCESS_KEY: ACCESS_KEY,
    S3_SECRET_KEY: state.storageSecret,
  };
}

const STORAGE_SETTINGS = ["S3_ENDPOINT", "S3_PUBLIC_ENDPOINT", "S3_BUCKET", "S3_REGION", "S3_ACCESS_KEY", "S3_SECRET_KEY"];

/** Half a storage account is a mistake: neither ours nor theirs would be right. */
function checkStorageSettings(environment: NodeJS.ProcessEnv): void {
  const needed = ["S3_ENDPOINT", "S3_BUCKET", "S3_ACCESS_KEY", "S3_SECRET_KEY"];
  const missing = needed.filter((name) => !environment[name]);
  if (missing.length === 0 || missing.length === needed.length) return;
  throw new Complaint(
    `Some S3 settings are given, but not ${missing.join(", ")}.`,
    `Set all of ${needed.join(", ")}, or none for the storage that comes along.`,
  );
}

function pick(environment: NodeJS.ProcessEnv, names: readonly string[]): Settings {
  return Object.fromEntries(names.flatMap((name) => (environment[name] ? [[name, environment[name]]] : [])));
}
