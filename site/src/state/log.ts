// Reading a log: from a file to evidence, one phase after another.
import { batch, signal } from "@preact/signals";
import { column } from "../engine/wire";
import { openBook, say, tables } from "./document";
import { engines, sentenceOf } from "./results";
import type { Casebook, Entry, Mapping, Preview, ReadReport, Studied } from "./types";
import { dialog } from "./view";

interface File {
  label: string;
  bytes: Uint8Array<ArrayBuffer>;
}

export type LogPhase =
  | { at: "choose" }
  | { at: "map"; file: File; preview: Preview; mapping: Mapping }
  | { at: "reading"; file: File; preview: Preview; mapping: Mapping; done: number }
  | { at: "problems"; file: File; preview: Preview; mapping: Mapping; report: ReadReport }
  | { at: "studying"; report: ReadReport; label: string; done: number; what: string; seconds: number };

export const phase = signal<LogPhase>({ at: "choose" });
export const logFault = signal<string | undefined>(undefined);
/** What the study of the log said, beside the evidence that is kept in the casebook. */
export const studied = signal<Studied | undefined>(undefined);
let stop: AbortController | undefined;

export function openLogDialog(): void {
  batch(() => {
    if (phase.peek().at !== "studying" && phase.peek().at !== "reading") phase.value = { at: "choose" };
    logFault.value = undefined;
    dialog.value = "log";
  });
}

function failed(e: unknown, back: LogPhase): void {
  batch(() => {
    phase.value = back;
    logFault.value = sentenceOf(e);
  });
}

/** What a file packed by gzip (RFC 1952) holds, any other as it is; at most so many bytes and a few. */
async function unpacked(bytes: Uint8Array<ArrayBuffer>, limit: number): Promise<Uint8Array<ArrayBuffer>> {
  if (bytes[0] !== 0x1f || bytes[1] !== 0x8b) return bytes;
  const parts: Uint8Array<ArrayBuffer>[] = [];
  let size = 0;
  const from = new Blob([bytes]).stream().pipeThrough(new DecompressionStream("gzip")).getReader();
  for (;;) {
    const { value, done } = await from.read();
    if (done) break;
    parts.push(value as Uint8Array<ArrayBuffer>);
    if ((size += value.length) > limit) break;
  }
  return new Uint8Array(await new Blob(parts).arrayBuffer());
}

export async function take(label: string, bytes: Uint8Array<ArrayBuffer>): Promise<void> {
  logFault.value = undefined;
  const limit = tables.peek()?.limits.bytes ?? Infinity;
  try {
    bytes = await unpacked(bytes, limit);
  } catch {
    logFault.value = "The file is packed by gzip, but it is cut off or damaged. Nothing was loaded; pack it anew, or unpack it first.";
    return;
  }
  if (bytes.length > limit) {
    logFault.value = `The file has ${Math.round(bytes.length / 2 ** 20)} MiB; ${Math.round(limit / 2 ** 20)} are allowed. Nothing was loaded.`;
    return;
  }
  try {
    const r = await engines.reader.ask<Preview>("look", {}, { columns: [{ name: "file", data: bytes }] });
    phase.value = { at: "map", file: { label, bytes }, preview: r.body, mapping: r.body.mapping };
  } catch (e) {
    failed(e, { at: "choose" });
  }
}

export async function takeSample(): Promise<void> {
  try {
    const r = await engines.reader.ask("sample", {});
    const bytes = column<Uint8Array<ArrayBuffer>>(r, "file");
    if (bytes) await take("larkmoor-log.csv", bytes.slice());
  } catch (e) {
    failed(e, { at: "choose" });
  }
}

export function remap(m: Partial<Mapping>): void {
  const p = phase.peek();
  if (p.at === "map") phase.value = { ...p, mapping: { ...p.mapping, ...m } };
}

/** The file read last and how, so that it can be read again otherwise; gone with the page. */
export const lastRead = signal<Extract<LogPhase, { at: "map" }> | undefined>(undefined);

/** Reads the same file again, treated otherwise. */
export async function again(how: Partial<Mapping>): Promise<void> {
  const p = lastRead.peek();
  if (!p) return;
  batch(() => {
    logFault.value = undefined;
    phase.value = { ...p, mapping: { ...p.mapping, ...how } };
    dialog.value = "log";
  });
  await read();
}

export async function read(): Promise<void> {
  const p = phase.peek();
  if (p.at !== "map") return;
  lastRead.value = p;
  stop = new AbortController();
  logFault.value = undefined;
  phase.value = { ...p, at: "reading", done: 0 };
  try {
    const r = await engines.reader.ask<ReadReport>("read", { mapping: p.mapping, label: p.file.label }, {
      columns: [{ name: "file", data: p.file.bytes }],
      signal: stop.signal,
      progress: (q) => { if (phase.peek().at === "reading") phase.value = { ...p, at: "reading", done: q.done }; },
    });
    if (r.body.problems.length > 0) phase.value = { ...p, at: "problems", report: r.body };
    else await study(r.body, p.file.label);
  } catch (e) {
    failed(e, p);
  }
}

export function backToMap(): void {
  const p = phase.peek();
  if (p.at === "problems") phase.value = { at: "map", file: p.file, preview: p.preview, mapping: p.mapping };
}

export async function leaveOut(): Promise<void> {
  const p = phase.peek();
  if (p.at === "problems") await study(p.report, p.file.label);
}

export function cancelLog(): void {
  stop?.abort();
}

async function study(report: ReadReport, label: string): Promise<void> {
  stop = new AbortController();
  phase.value = { at: "studying", report, label, done: 0, what: "testing the plain rule", seconds: 0 };
  try {
    const r = await engines.reader.ask<Studied>("study", {}, {
      signal: stop.signal,
      progress: (q) => { if (phase.peek().at === "studying") phase.value = { at: "studying", report, label, ...q }; },
    });
    batch(() => {
      studied.value = r.body;
      phase.value = { at: "choose" };
      dialog.value = undefined;
      openBook(bookOf(r.body, label));
    });
    say("The log is read into a casebook of its own. The one before is kept under “Casebooks”.");
  } catch (e) {
    failed(e, { at: "choose" });
    if (!logFault.peek()) logFault.value = "Cancelled. The log was not read into a casebook.";
  }
}

/** A log opens a casebook of its own: with an entry that starts from it, or, where nothing can be grown from it, with a
 * plain network of the same size to compare with. */
function bookOf(s: Studied, label: string): Casebook {
  const standard = tables.peek()!.newEntry;
  const stand: Entry = {
    ...standard,
    title: "A plain network of the same size",
    note: "Not your network: one grown by the plain rule with equal members, to compare shares with.",
    sharpness: 0,
    growth: { ...standard.growth, members: Math.max(2, s.evidence.members), links: Math.min(64, Math.max(1, Math.round(s.evidence.links / Math.max(1, s.evidence.members)))) },
    outlook: { ...standard.outlook, horizon: Math.min(4 * s.evidence.members, 1e7) },
  };
  return { casebook: 1, title: label.replace(/\.gz$/i, "").replace(/\.[a-z]+$/i, "").replace(/[-_]/g, " "), entries: [s.entry ?? stand], evidence: s.evidence };
}
