// In: the environment. Out: checked settings. The only file that reads process.env.
// It must load in plain Node too (migrations, the start command), so it does not import "server-only".
import { z } from "zod";

const flag = z.enum(["true", "false"]).transform((word) => word === "true");
const webAddress = z.url({ protocol: /^https?$/, error: "must be an address beginning with http:// or https://" });

const databaseShape = z.object({
  DATABASE_URL: z.url({ protocol: /^postgres(ql)?$/, error: "must be an address beginning with postgresql://" }),
  DATABASE_POOL: z.coerce.number().int().min(1).max(200).default(10),
});

const shape = databaseShape.extend({
  S3_ENDPOINT: webAddress,
  S3_PUBLIC_ENDPOINT: webAddress.optional(),
  S3_BUCKET: z.string().min(3).max(63),
  S3_REGION: z.string().min(1).default("us-east-1"),
  S3_ACCESS_KEY: z.string().min(1),
  S3_SECRET_KEY: z.string().min(1),
  SMTP_URL: z.url({ protocol: /^smtps?$/, error: "must be an address beginning with smtp:// or smtps://" }),
  MAIL_FROM: z.string().min(3),
  APP_URL: webAddress,
  SESSION_SECURE: flag.optional(),
  PROXY_HOPS: z.coerce.number().int().min(0).max(5).default(0),
});

export interface DatabaseSettings {
  readonly url: string;
  /** Connections one process may hold. */
  readonly pool: number;
}

export interface Settings {
  readonly database: DatabaseSettings;
  readonly storage: {
    readonly endpoint: string;
    /** The same storage as browsers reach it; differs from `endpoint` when the server sits in a private network. */
    readonly publicEndpoint: string;
    readonly bucket: string;
    readonly region: string;
    readonly accessKey: string;
    readonly secretKey: string;
  };
  readonly mail: { readonly url: string; readonly from: string };
  readonly app: {
    /** Address people type, without a slash at the end; links in mails begin with it. */
    readonly url: string;
    /** Whether cookies travel only over https. */
    readonly secureCookies: boolean;
    /** Trusted proxies in front; the caller's address is that many places from the right in X-Forwarded-For. */
    readonly proxyHops: number;
  };
}

/** Every wrong variable by name, one a line, so that the whole environment is mended in one go. */
export class SettingsError extends Error {
  override readonly name = "SettingsError";
}

type Environment = Readonly<Record<string, string | undefined>>;

function check<T extends z.ZodType>(what: T, environment: Environment): z.output<T> {
  // An empty variable means the same as none: compose files and shells make them by accident.
  const given = Object.fromEntries(Object.entries(environment).filter(([, value]) => value !== ""));
  const checked = what.safeParse(given);
  if (checked.success) return checked.data;
  const lines = checked.error.issues.map((issue) => {
    const name = issue.path.join(".");
    return `  ${name}: ${given[name] === undefined ? "is not set" : issue.message}`;
  });
  throw new SettingsError(`The environment is not usable:\n${lines.join("\n")}`);
}

/** Settings of the database alone, for migrations. */
export function readDatabaseSettings(environment: Environment): DatabaseSettings {
  const read = check(databaseShape, environment);
  return { url: read.DATABASE_URL, pool: read.DATABASE_POOL };
}

/** All settings; throws {@link SettingsError}. */
export function readSettings(environment: Environment): Settings {
  const read = check(shape, environment);
  const url = read.APP_URL.replace(/\/+$/, "");
  return {
    database: { url: read.DATABASE_URL, pool: read.DATABASE_POOL },
    storage: {
      endpoint: read.S3_ENDPOINT,
      publicEndpoint: read.S3_PUBLIC_ENDPOINT ?? read.S3_ENDPOINT,
      bucket: read.S3_BUCKET,
      region: read.S3_REGION,
      accessKey: read.S3_ACCESS_KEY,
      secretKey: read.S3_SECRET_KEY,
    },
    mail: { url: read.SMTP_URL, from: read.MAIL_FROM },
    app: { url, secureCookies: read.SESSION_SECURE ?? url.startsWith("https://"), proxyHops: read.PROXY_HOPS },
  };
}

let checked: Settings | undefined;

/** The settings of this process, read on first use: a build needs none. */
export function settings(): Settings {
  checked ??= readSettings(process.env);
  return checked;
}

/** The database settings of this process; migrations need nothing else. */
export function databaseSettings(): DatabaseSettings {
  return checked?.database ?? readDatabaseSettings(process.env);
}

/** Whether this process serves the development build, whose scripts need a looser content policy. */
export function development(): boolean {
  return process.env.NODE_ENV === "development";
}
