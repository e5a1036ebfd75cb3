// The browser's storage and the address: the only file that touches them.
import { signal } from "@preact/signals";
import type { Casebook } from "./types";

const prefix = "preponder.book.";

/** What became of the last attempt to keep the casebook. */
export const kept = signal<"kept" | "changed" | "denied">("changed");

export interface Shelved {
  id: string;
  title: string;
  at: number;
}

interface Stored {
  at: number;
  open: number;
  book: Casebook;
}

function attempt<T>(f: () => T): T | undefined {
  try {
    return f();
  } catch {
    return undefined;
  }
}

export function keep(id: string, book: Casebook, open: number): void {
  const ok = attempt(() => {
    const stored: Stored = { at: Date.now(), open, book };
    localStorage.setItem(prefix + id, JSON.stringify(stored));
    localStorage.setItem("preponder.last", id);
    return true;
  });
  kept.value = ok ? "kept" : "denied";
}

export function stored(id: string): Stored | undefined {
  return attempt(() => JSON.parse(localStorage.getItem(prefix + id) ?? "") as Stored);
}

export function last(): string | undefined {
  return attempt(() => localStorage.getItem("preponder.last") ?? undefined);
}

export function drop(id: string): void {
  attempt(() => localStorage.removeItem(prefix + id));
}

export function shelf(): Shelved[] {
  const all = attempt(() => Object.keys(localStorage).filter((k) => k.startsWith(prefix))) ?? [];
  return all
    .map((k) => k.slice(prefix.length))
    .flatMap((id) => {
      const s = stored(id);
      return s ? [{ id, title: s.book.title || "Untitled casebook", at: s.at }] : [];
    })
    .sort((a, b) => b.at - a.at);
}

export function preference(name: string): string | undefined {
  return attempt(() => localStorage.getItem(`preponder.${name}`) ?? undefined);
}

export function prefer(name: string, value: string): void {
  attempt(() => localStorage.setItem(`preponder.${name}`, value));
}

/** The code in the address, if there is one. */
export function codeInAddress(): string | undefined {
  const at = location.hash.indexOf("#c=");
  return at === 0 ? location.hash.slice(3) : undefined;
}

/** The address that opens a code on one of its entries. */
export function addressWith(code: string, entry: number): string {
  return `${location.href.split("#")[0]}#c=${code}${entry > 0 ? `&entry=${entry + 1}` : ""}`;
}

/** Whether this page was opened from a file, whose path means nothing elsewhere. */
export const fromFile = (): boolean => location.protocol === "file:";

/** Takes the code out of the address, so that a reload opens what was made since. */
export function clearAddress(): void {
  attempt(() => history.replaceState(null, "", location.href.split("#")[0]));
}

export function onAddress(f: () => void): void {
  window.addEventListener("hashchange", f);
}
