// The network on show as a file, fetched part by part, so that a large one is never held twice.
import { signal } from "@preact/signals";
import { column } from "../engine/wire";
import { engines, fault, sentenceOf } from "./results";

export type NetworkFile = "log" | "graphml" | "degrees";

/** How far a file is written. */
export const writing = signal<{ what: NetworkFile; done: number } | undefined>(undefined);
let stop: AbortController | undefined;

export const cancelWriting = (): void => stop?.abort();

const types: Record<NetworkFile, string> = { log: "text/csv", degrees: "text/csv", graphml: "application/xml" };

/** The file, or undefined where it was cancelled or failed (which is said). */
export async function networkFile(what: NetworkFile): Promise<Blob | undefined> {
  const mine = (stop = new AbortController());
  const parts: Blob[] = [];
  try {
    for (let part = 0, of = 1; part < of; part++) {
      if (mine.signal.aborted) return undefined;
      const r = await engines.main.ask<{ parts: number }>("export", { what, part }, { signal: mine.signal });
      of = r.body.parts;
      const bytes = column<Uint8Array<ArrayBuffer>>(r, "file");
      if (bytes) parts.push(new Blob([bytes]));
      writing.value = part + 1 < of ? { what, done: (part + 1) / of } : undefined;
    }
    return new Blob(parts, { type: types[what] });
  } catch (e) {
    const s = sentenceOf(e);
    if (s) fault.value = s;
    return undefined;
  } finally {
    if (stop === mine) writing.value = undefined;
  }
}
