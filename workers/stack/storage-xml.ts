// In: plain values. Out: the small XML documents of the S3 interface, both ways.

import { StorageError } from "./storage-error";

export type XmlValue = string | number | boolean | undefined | XmlNode | readonly XmlNode[] | readonly string[];
export interface XmlNode {
  readonly [name: string]: XmlValue;
}

/** A document with one root; arrays repeat their element, undefined leaves it out. */
export function xmlDocument(root: string, content: XmlNode): string {
  return `<?xml version="1.0" encoding="UTF-8"?>\n<${root} xmlns="http://s3.amazonaws.com/doc/2006-03-01/">${render(content)}</${root}>`;
}

function render(node: XmlNode): string {
  return Object.entries(node)
    .map(([name, value]) => {
      const values = Array.isArray(value) ? value : [value];
      return values.map((one) => element(name, one)).join("");
    })
    .join("");
}

function element(name: string, value: string | number | boolean | XmlNode | undefined): string {
  if (value === undefined) return "";
  return `<${name}>${typeof value === "object" ? render(value) : escapeXml(String(value))}</${name}>`;
}

export function escapeXml(text: string): string {
  const named: Record<string, string> = { "&": "&amp;", "<": "&lt;", ">": "&gt;", '"': "&quot;", "'": "&apos;" };
  // Control characters may stand in a key but not in XML 1.0 as such.
  return text.replace(/[&<>"']/g, (found) => named[found]).replace(/[\r\n\t]/g, (found) => `&#${found.charCodeAt(0)};`);
}

/** The contents of every element of that name, at any depth, in order; enough for the two documents that clients send. */
export function xmlElements(text: string, name: string): string[] {
  return [...text.matchAll(new RegExp(`<${name}(?:\\s[^>]*)?>([\\s\\S]*?)</${name}>`, "g"))].map((match) => match[1]);
}

/** The text of the one element of that name. */
export function xmlText(text: string, name: string): string {
  const [first] = xmlElements(text, name);
  if (first === undefined) throw new StorageError("MalformedXML", `The document has no <${name}>.`);
  return first.replace(/&(?:#(\d+)|#x([0-9a-fA-F]+)|(amp|lt|gt|quot|apos));/g, (_all, decimal, hex, named) => {
    if (decimal) return String.fromCodePoint(Number(decimal));
    if (hex) return String.fromCodePoint(Number.parseInt(hex, 16));
    return { amp: "&", lt: "<", gt: ">", quot: '"', apos: "'" }[named as "amp" | "lt" | "gt" | "quot" | "apos"];
  });
}
