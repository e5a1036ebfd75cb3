// The stage: Ebiten in a document of its own, which only draws. All input and all labels belong to the page.
export interface StageSettings {
  members: number;
  arrival: boolean;
  theme: string;
  zoom: number;
  panX: number;
  panY: number;
  ceiling: number;
  follow: number;
  hover: number;
  quick: boolean;
  playing: boolean;
  still: boolean;
  small: boolean;
  label: number;
}

export interface Spot {
  member: number;
  share: number;
  x: number;
  y: number;
  r: number;
}

/** What a painted picture says of itself, in CSS pixels. */
export interface Said {
  ready?: boolean;
  cx: number;
  cy: number;
  r: number;
  members: number;
  links: number;
  oneStrokeFor: number;
  rings: number[];
  leader?: Spot;
  next?: Spot;
  label?: { x: number; y: number };
  capped: number[];
}

interface StageWindow extends Window {
  Go: new () => { importObject: WebAssembly.Imports; run(i: WebAssembly.Instance): Promise<void> };
  WebAssembly: typeof WebAssembly;
  Uint8Array: typeof Uint8Array;
  HTMLCanvasElement: typeof HTMLCanvasElement;
  stage?: {
    load(bytes: Uint8Array): void;
    set(json: string): void;
    pick(x: number, y: number): number;
    place(member: number): [number, number, number];
    end(): void;
  };
  stageSaid(json: string): void;
  stageBusy(on: boolean): void;
}

export interface StageEvents {
  said: (s: Said) => void;
  ready: () => void;
  /** The stage cannot run here, or no longer. */
  lost: (sentence: string) => void;
}

export class Stage {
  private frame: HTMLIFrameElement | undefined;
  private window: StageWindow | undefined;
  private wake: () => void = () => {};
  private drawNow: () => void = () => {};
  private settings: string | undefined;
  private network: Uint8Array<ArrayBuffer> | undefined;
  private rebuilds = 0;
  private unseen = false; // a picture was drawn since the last frame
  private refused = false; // no drawing context is to be had

  constructor(
    private readonly host: HTMLElement,
    private readonly script: string,
    private readonly module: () => Promise<WebAssembly.Module>,
    private readonly events: StageEvents,
  ) {
    this.build();
    // The density of the screen is read once by the stage: a page moved to another screen gets a new stage.
    const density = () =>
      matchMedia(`(resolution: ${devicePixelRatio}dppx)`).addEventListener("change", () => { this.rebuild(); density(); }, { once: true });
    density();
    new ResizeObserver(() => this.wake()).observe(host);
  }

  private build(): void {
    const frame = document.createElement("iframe");
    frame.inert = true;
    frame.setAttribute("aria-hidden", "true");
    frame.tabIndex = -1;
    frame.title = "Drawing of the network";
    frame.srcdoc = `<!doctype html><meta charset="utf-8"><title>Stage</title><body><script>${this.script}</script>`;
    frame.addEventListener("load", () => void this.run(frame), { once: true });
    this.frame = frame;
    this.host.replaceChildren(frame);
  }

  private async run(frame: HTMLIFrameElement): Promise<void> {
    const w = frame.contentWindow as StageWindow | null;
    if (!w) return;
    this.tame(w);
    const go = new w.Go();
    w.stageSaid = (json) => {
      const s = JSON.parse(json) as Said;
      if (s.ready) this.ready(w);
      else this.events.said(s);
    };
    const module = await this.module();
    const instance = await w.WebAssembly.instantiate(module, go.importObject);
    await go.run(instance);
    if (this.frame === frame) this.lost();
  }

  /** Colour only (the picture is opaque, and nothing else is drawn), frames only when asked for, and a lost context is ours
   * to handle. */
  private tame(w: StageWindow): void {
    const context = w.HTMLCanvasElement.prototype.getContext as (type: string, a?: object) => RenderingContext | null;
    w.HTMLCanvasElement.prototype.getContext = function (this: HTMLCanvasElement, type: string, a?: object) {
      const got = context.call(this, type, { ...a, antialias: false, alpha: false, stencil: false, depth: false });
      if (!got && type === "webgl2") refuse();
      return got;
    } as typeof w.HTMLCanvasElement.prototype.getContext;
    const refuse = (): void => { this.refused = true; };
    const next = w.requestAnimationFrame.bind(w);
    let parked: FrameRequestCallback | undefined;
    let busy = false;
    w.requestAnimationFrame = (f) => {
      if (busy) return next(f);
      parked = f;
      return 0;
    };
    this.wake = () => {
      const f = parked;
      parked = undefined;
      if (f) next(f);
    };
    this.drawNow = () => {
      const f = parked;
      parked = undefined;
      f?.(w.performance.now());
    };
    w.stageBusy = (on) => {
      busy = on;
      if (on) this.wake();
    };
    w.addEventListener("webglcontextlost", (e) => {
      e.stopImmediatePropagation();
      e.preventDefault();
      this.lost();
    }, true);
  }

  private ready(w: StageWindow): void {
    this.window = w;
    if (this.network) this.load(this.network);
    if (this.settings) w.stage?.set(this.settings);
    this.events.ready();
    this.wake();
  }

  private lost(): void {
    this.window = undefined; // what has ended takes no calls
    if (this.refused) this.events.lost("This browser draws no WebGL, so the picture stands still; all figures and controls work.");
    else if (this.rebuilds++ < 5) this.rebuild();
    else this.events.lost("The picture stopped working. Everything else goes on.");
  }

  rebuild(): void {
    this.window = undefined;
    this.build();
  }

  /** Hands a reply's bytes over; kept, so that a stage started anew gets them again. */
  load(bytes: Uint8Array<ArrayBuffer>): void {
    this.network = bytes;
    const w = this.window;
    if (!w?.stage) return;
    w.stage.load(new w.Uint8Array(bytes.buffer, bytes.byteOffset, bytes.byteLength));
    // Before the charts, since the picture is what is looked at while something is dragged; but one picture a frame.
    if (this.unseen) {
      this.wake();
      return;
    }
    this.drawNow();
    this.unseen = true;
    requestAnimationFrame(() => (this.unseen = false));
  }

  set(s: StageSettings): void {
    const json = JSON.stringify(s);
    if (json === this.settings) return;
    this.settings = json;
    this.window?.stage?.set(json);
    this.wake();
  }

  /** The size of the picture in pixels, as the stage itself takes it. */
  size(): { width: number; height: number; scale: number } {
    const scale = devicePixelRatio;
    return { width: Math.floor(this.host.clientWidth * scale), height: Math.floor(this.host.clientHeight * scale), scale };
  }

  pick(x: number, y: number): number {
    return this.window?.stage?.pick(x, y) ?? -1;
  }

  place(member: number): [number, number, number] | undefined {
    return this.window?.stage?.place(member);
  }
}
