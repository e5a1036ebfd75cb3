// The page's side of one engine worker: requests by number, progress, cancel; a worker that dies is started anew.
import { decode, encode, type Column, type Packet } from "./wire";

export interface Progress {
  done: number;
  what: string;
  seconds: number;
}

/** Why there is no answer. */
export class Failure extends Error {
  constructor(
    sentence: string,
    readonly cancelled = false,
    readonly fault = false,
  ) {
    super(sentence);
  }
}

export interface AskOptions {
  columns?: Column[];
  progress?: (p: Progress) => void;
  signal?: AbortSignal;
  /** Requests that take one another's place, where that is not all of their kind. */
  slot?: string;
}

/** A reply: its head's body, its columns, and the bytes it came in. */
export interface Reply<T> extends Packet {
  body: T;
  bytes: Uint8Array<ArrayBuffer>;
}

interface Waiting {
  resolve: (r: Reply<never>) => void;
  reject: (f: Failure) => void;
  progress?: (p: Progress) => void;
}

/** Code and module an engine starts from, made once. */
export interface Source {
  script: string;
  module: Promise<WebAssembly.Module>;
}

export class Engine {
  private worker: Worker | undefined;
  private next = 1;
  private readonly waiting = new Map<number, Waiting>();
  private readonly newest = new Map<string, { running: boolean; then?: () => void; drop?: () => void }>();

  constructor(private readonly source: Source) {}

  private start(): Worker {
    const url = URL.createObjectURL(new Blob([this.source.script], { type: "text/javascript" }));
    const worker = new Worker(url);
    URL.revokeObjectURL(url);
    worker.onmessage = (e: MessageEvent<Uint8Array<ArrayBuffer> | "ended">) => {
      if (e.data === "ended") this.died();
      else this.settle(e.data);
    };
    worker.onerror = () => this.died();
    this.source.module.then(
      (m) => worker.postMessage(m),
      (e: unknown) => this.fail(new Failure(`The engine could not be prepared (${String(e)}). Try another browser.`, false, true)),
    );
    return worker;
  }

  /** Ends the worker; its memory goes with it. The next request starts a new one. */
  restart(): void {
    this.worker?.terminate();
    this.worker = undefined;
    this.fail(new Failure("Cancelled.", true));
  }

  private died(): void {
    this.worker?.terminate();
    this.worker = undefined;
    this.fail(new Failure("The engine stopped. It has been started again; nothing of the casebook is lost.", false, true));
  }

  private fail(f: Failure): void {
    const all = [...this.waiting.values()];
    this.waiting.clear();
    for (const w of all) w.reject(f);
  }

  private settle(bytes: Uint8Array<ArrayBuffer>): void {
    const p = decode(bytes);
    const w = this.waiting.get(p.id);
    if (!w) return; // nobody waits for it any more
    if (p.kind === "progress") {
      w.progress?.(p.body as Progress);
      return;
    }
    this.waiting.delete(p.id);
    if (p.kind === "done") {
      w.resolve({ ...p, bytes } as Reply<never>);
    } else {
      const f = p.body as { sentence: string; cancelled: boolean; fault: boolean };
      w.reject(new Failure(f.sentence, f.cancelled, f.fault));
    }
  }

  ask<T>(kind: string, body: unknown, options: AskOptions = {}): Promise<Reply<T>> {
    this.worker ??= this.start();
    const worker = this.worker;
    const id = this.next++;
    const bytes = encode({ id, kind, body, columns: options.columns ?? [] });
    return new Promise<Reply<T>>((resolve, reject) => {
      this.waiting.set(id, { resolve: resolve as Waiting["resolve"], reject, progress: options.progress });
      options.signal?.addEventListener("abort", () => {
        if (!this.waiting.has(id)) return;
        const cancel = encode({ id, kind: "cancel", body: {}, columns: [] });
        worker.postMessage(cancel, [cancel.buffer]);
      });
      worker.postMessage(bytes, [bytes.buffer]);
    });
  }

  /** Like ask, but of one kind only one request runs and one waits; a newer one takes the place of the one waiting. A body
   * that is a function is called when its turn comes. */
  async askNewest<T>(kind: string, body: unknown, options: AskOptions = {}): Promise<Reply<T> | undefined> {
    const name = options.slot ?? kind;
    let slot = this.newest.get(name);
    if (!slot) this.newest.set(name, (slot = { running: false }));
    const mine = slot;
    if (mine.running) {
      mine.drop?.();
      const go = await new Promise<boolean>((resolve) => {
        mine.then = () => resolve(true);
        mine.drop = () => resolve(false);
      });
      if (!go) return undefined;
      mine.then = mine.drop = undefined;
    }
    mine.running = true;
    try {
      return await this.ask<T>(kind, typeof body === "function" ? (body as () => unknown)() : body, options);
    } finally {
      mine.running = false;
      mine.then?.();
    }
  }
}
