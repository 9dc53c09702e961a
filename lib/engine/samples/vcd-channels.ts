// In: the declarations of a VCD. Out: the channels that it offers, each with the net and bit to follow.

import { ok, type Result } from "../../base/result";
import { findChannel } from "../channels/names";
import type { Channel } from "./reader";
import type { Declared } from "./vcd-header";

/** One channel and where its value comes from. `net` is an index into `codes`; `bit` counts from the right. */
export interface Offer {
  readonly channel: Channel;
  readonly net: number;
  readonly bit: number;
  readonly real: boolean;
}

export interface Offers {
  /** Identifier codes of all variables, each once. */
  readonly codes: readonly string[];
  readonly offers: readonly Offer[];
  /** Vectors too wide to be offered bit by bit: a bit is made when it is asked for. */
  readonly vectors: readonly { readonly declared: Declared; readonly net: number }[];
}

/** Vectors up to this width are offered bit by bit, as long as all bits together stay below the budget. */
const WIDEST = 32;
const BUDGET = 256;
const NOT_LINES = new Set(["event", "integer", "parameter", "time", "string"]);

export function offersOf(variables: readonly Declared[]): Offers {
  const nets = new Map<string, number>();
  const seen = new Set<string>();
  const offers: Offer[] = [];
  const vectors: { declared: Declared; net: number }[] = [];
  let budget = BUDGET;
  for (const declared of variables) {
    const net = nets.get(declared.code) ?? nets.size;
    nets.set(declared.code, net);
    // The same path twice (a scope dumped twice) is one channel.
    const key = `${declared.path} ${declared.range?.join(":") ?? ""}`;
    if (seen.has(key)) continue;
    seen.add(key);
    if (declared.type === "real" || declared.type === "realtime") {
      offers.push({ channel: { id: declared.path, name: declared.name, unit: "V", kind: "volts" }, net, bit: 0, real: true });
    } else if (declared.size === 1 && !NOT_LINES.has(declared.type)) {
      offers.push({ channel: { id: declared.path, name: declared.name, unit: null, kind: "digital" }, net, bit: 0, real: false });
    } else if (declared.size > 1 && declared.size <= Math.min(WIDEST, budget) && !NOT_LINES.has(declared.type)) {
      budget -= declared.size;
      for (let bit = declared.size - 1; bit >= 0; bit--) offers.push(bitOffer(declared, net, bit));
    } else {
      const range = declared.range ? `[${declared.range[0]}:${declared.range[1]}]` : "";
      offers.push({
        channel: { id: declared.path + range, name: declared.name + range, unit: null, kind: "other" },
        net,
        bit: 0,
        real: false,
      });
      if (declared.size > 1) vectors.push({ declared, net });
    }
  }
  return { codes: [...nets.keys()], offers, vectors };
}

/** Index of the bit that stands `bit` places from the right. */
function indexOf(declared: Declared, bit: number): number {
  const [msb, lsb] = declared.range ?? [declared.size - 1, 0];
  return msb >= lsb ? lsb + bit : lsb - bit;
}

function bitOffer(declared: Declared, net: number, bit: number): Offer {
  const index = `[${indexOf(declared, bit)}]`;
  return {
    channel: { id: declared.path + index, name: declared.name + index, unit: null, kind: "digital" },
    net,
    bit,
    real: false,
  };
}

/** The channel that a person names; one bit of a wide vector is made here. Returns the offers with it among them. */
export function withChosen(offers: Offers, wanted: string | null | undefined): Offers {
  const match = /^(.*?)\s*\[(-?\d+)\]$/.exec(wanted ?? "");
  if (match === null) return offers;
  const made: Offer[] = [];
  for (const { declared, net } of offers.vectors) {
    if (declared.path !== match[1] && declared.name !== match[1] && !declared.path.endsWith(`.${match[1]}`)) continue;
    const [msb, lsb] = declared.range ?? [declared.size - 1, 0];
    const bit = msb >= lsb ? Number(match[2]) - lsb : lsb - Number(match[2]);
    const offer = bit >= 0 && bit < declared.size ? bitOffer(declared, net, bit) : null;
    if (offer && !offers.offers.some((other) => other.channel.id === offer.channel.id)) made.push(offer);
  }
  return made.length === 0 ? offers : { ...offers, offers: [...offers.offers, ...made] };
}

/** The offer that `wanted` names; two names of one net are one. */
export function findOffer(offers: Offers, wanted: string): Result<Offer> {
  const of = (channel: Channel) => offers.offers.find((offer) => offer.channel === channel);
  const found = findChannel(
    offers.offers.map((offer) => offer.channel),
    wanted,
    (a, b) => of(a)?.net === of(b)?.net && of(a)?.bit === of(b)?.bit,
  );
  if (!found.ok) return found;
  const offer = of(found.value);
  if (offer === undefined || offer.channel.kind === "other") {
    return {
      ok: false,
      problem: {
        code: "unusable-channel",
        message: `Channel ${found.value.id} cannot be a bus line: it is not a single line of levels or volts.`,
        advice: "Choose a scalar, a real, or one bit of a vector, as name[0].",
        place: {},
      },
    };
  }
  return ok(offer);
}
