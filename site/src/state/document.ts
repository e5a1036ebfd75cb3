// The casebook that is open, and its history. Immutable values, replaced whole.
import { batch, computed, signal } from "@preact/signals";
import type { Casebook, Entry, Tables } from "./types";

/** What is open: the casebook, a number for each entry that outlives edits, and which entry is unfolded. */
export interface Doc {
  id: string;
  book: Casebook;
  keys: number[];
  open: number; // key of the unfolded entry, 0 = none
}

let nextKey = 1;
const fresh = (): number => nextKey++;

export const tables = signal<Tables | undefined>(undefined);
export const doc = signal<Doc | undefined>(undefined);
const past = signal<Doc[]>([]);
const future = signal<Doc[]>([]);
export const canUndo = computed(() => past.value.length > 0);
export const canRedo = computed(() => future.value.length > 0);

export interface Toast {
  text: string;
  undo?: boolean;
  stays?: boolean;
}
export const toast = signal<Toast | undefined>(undefined);
let toastTimer = 0;
export function say(text: string, canBeUndone = false): void {
  toast.value = { text, undo: canBeUndone };
  clearTimeout(toastTimer);
  toastTimer = window.setTimeout(() => (toast.value = undefined), 8000);
}

/** Says what must not be missed: it stays until it is dismissed. */
export function warn(text: string): void {
  clearTimeout(toastTimer);
  toast.value = { text, stays: true };
}

/** The unfolded entry and its place. */
export const current = computed<{ entry: Entry; index: number } | undefined>(() => {
  const d = doc.value;
  if (!d) return undefined;
  const index = d.keys.indexOf(d.open);
  const entry = d.book.entries[index];
  return entry ? { entry, index } : undefined;
});

const deepest = 200;
let dragging = false;
let dragged = false;

/** Later edits until endDrag are one step of undo. */
export function beginDrag(): void {
  dragging = true;
  dragged = false;
}

export function endDrag(): void {
  dragging = false;
}

export const isDragging = (): boolean => dragging;

function change(next: Doc): void {
  const now = doc.peek();
  batch(() => {
    if (now && !(dragging && dragged)) past.value = [...past.peek().slice(1 - deepest), now];
    dragged = true;
    future.value = [];
    doc.value = next;
  });
}

/** Opens a casebook; the one open before stays in the browser under its own id. */
export function openBook(book: Casebook, open = 0, id: string = crypto.randomUUID()): void {
  const keys = book.entries.map(fresh);
  batch(() => {
    past.value = [];
    future.value = [];
    doc.value = { id, book, keys, open: keys[Math.min(open, keys.length - 1)] ?? 0 };
  });
}

/** Changes the casebook. */
export function edit(f: (book: Casebook) => Casebook): void {
  const d = doc.peek();
  if (d) change({ ...d, book: f(d.book) });
}

/** Changes the unfolded entry. */
export function editEntry(f: (e: Entry) => Entry): void {
  const c = current.peek();
  if (c) edit((b) => ({ ...b, entries: b.entries.map((e, i) => (i === c.index ? f(e) : e)) }));
}

export function unfold(key: number): void {
  const d = doc.peek();
  if (d) doc.value = { ...d, open: d.open === key ? 0 : key };
}

function place(index: number, entry: Entry): void {
  const d = doc.peek();
  if (!d) return;
  const key = fresh();
  const entries = [...d.book.entries.slice(0, index), entry, ...d.book.entries.slice(index)];
  change({ ...d, book: { ...d.book, entries }, keys: [...d.keys.slice(0, index), key, ...d.keys.slice(index)], open: key });
}

export function addEntry(): void {
  const d = doc.peek();
  const t = tables.peek();
  if (d && t) place(d.book.entries.length, { ...t.newEntry, title: "New entry" });
}

export function duplicate(index: number): void {
  const e = doc.peek()?.book.entries[index];
  if (e) place(index + 1, { ...e, title: `${e.title || "Entry"}, changed` });
}

export function remove(index: number): void {
  const d = doc.peek();
  if (!d) return;
  if (d.book.entries.length === 1) {
    say("A casebook keeps at least one entry.");
    return;
  }
  const title = d.book.entries[index]?.title || "Entry";
  const entries = d.book.entries.filter((_, i) => i !== index);
  const keys = d.keys.filter((_, i) => i !== index);
  const open = d.open === d.keys[index] ? (keys[Math.min(index, keys.length - 1)] ?? 0) : d.open;
  change({ ...d, book: { ...d.book, entries }, keys, open });
  say(`“${title}” removed.`, true);
}

export function move(index: number, by: number): void {
  const d = doc.peek();
  const to = index + by;
  if (!d || to < 0 || to >= d.keys.length) return;
  const swap = <T,>(list: T[]): T[] => list.map((v, i) => (i === index ? list[to]! : i === to ? list[index]! : v));
  change({ ...d, book: { ...d.book, entries: swap(d.book.entries) }, keys: swap(d.keys) });
}

function travel(from: typeof past, to: typeof future): void {
  const d = doc.peek();
  const next = from.peek().at(-1);
  if (!d || !next) return;
  batch(() => {
    from.value = from.peek().slice(0, -1);
    to.value = [...to.peek(), d];
    // Where entries came or went, what was unfolded then is unfolded again; else what is unfolded stays.
    const open = next.keys.join() === d.keys.join() ? d.open : next.open;
    doc.value = { ...next, open };
    toast.value = undefined;
  });
}

export const undo = (): void => travel(past, future);
export const redo = (): void => travel(future, past);

/** What the engine needs of one entry: without its title and note, with the evidence only where it is used. */
export function projection(book: Casebook, e: Entry): Casebook {
  const uses = e.law.family === "evidence" || e.growth.start === "evidence";
  return { casebook: book.casebook, title: "", entries: [{ ...e, title: "", note: "", outlook: { horizon: 20000, runs: 200, limit: 0.2 } }], evidence: uses ? book.evidence : null };
}
