// What the engines answered, and what is asked of them.
import { computed, signal } from "@preact/signals";
import { Engine, Failure, type Source } from "../engine/engine";
import type { Grown, Outlook, Solved } from "./types";

/** The engines: one grows the network on show, one beside it solves and makes the marks, one reads logs, the pool looks
 * forward. */
export interface Engines {
  main: Engine;
  side: Engine;
  reader: Engine;
  pool: Engine[];
}

export let engines: Engines;

export function startEngines(source: Source): void {
  const cores = Math.max(1, Math.min(4, (navigator.hardwareConcurrency || 2) - 1));
  engines = { main: new Engine(source), side: new Engine(source), reader: new Engine(source), pool: Array.from({ length: cores }, () => new Engine(source)) };
}

/** A result and the question it answers. */
export interface Answer<T> {
  key: string;
  value: T;
}

export const solved = signal<Answer<Solved> | undefined>(undefined);
/** How far the planned size of the open entry is from endless growth, as a sentence; asked for when nothing moves. */
export const reached = signal<Answer<string> | undefined>(undefined);
export const grown = signal<Answer<Grown> | undefined>(undefined);
/** Curves held to compare with. */
export const held = signal<Solved | undefined>(undefined);
/** What went wrong with the entry that is open, as a sentence. */
export const fault = signal<string | undefined>(undefined);
/** How far a long growth has come. */
export const growing = signal<{ done: number; what: string } | undefined>(undefined);
/** An entry too large to be grown without being asked for. */
export const waitingToGrow = signal<string | undefined>(undefined);

/** Folded entries: a verdict, a line and a mark, by what they were made from. */
export interface Digest {
  heading: string;
  line: string;
  mark: ImageData | undefined;
}
export const digests = signal<ReadonlyMap<string, Digest>>(new Map());

export interface Running {
  key: string;
  done: number;
  of: number;
  since: number;
}
export const outlooks = signal<ReadonlyMap<string, Outlook>>(new Map());
export const running = signal<Running | undefined>(undefined);
export const outlookFault = signal<string | undefined>(undefined);
export const busy = computed(() => running.value !== undefined);

export function sentenceOf(e: unknown): string | undefined {
  if (e instanceof Failure) return e.cancelled ? undefined : e.message;
  return `Something went wrong: ${String(e)}.`;
}
