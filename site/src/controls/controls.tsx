// Labelled controls: a slider with a number field, a yes-or-no, a text that grows.
import type { ComponentChildren, JSX } from "preact";
import { useEffect, useId, useRef, useState } from "preact/hooks";
import { typed } from "../words/format";

export interface SliderProps {
  label: string;
  value: number;
  low: number;
  high: number;
  slide: [number, number];
  step: number;
  open?: boolean; // low itself is not allowed
  log?: boolean;
  whole?: boolean;
  unit?: string;
  help?: string;
  onBegin?: () => void;
  onEnd?: () => void;
  onChange: (v: number) => void;
}

const notches = 1000;

/** A slider over the usual range, a number field for all of it. What cannot be is said, and the last good value stays. */
export function Slider(p: SliderProps): JSX.Element {
  const id = useId();
  const [text, setText] = useState<string | undefined>(undefined);
  const [fault, setFault] = useState<string | undefined>(undefined);
  const [a, b] = p.slide;
  // Keys pressed one after another are one step of undo, like one drag.
  const pressing = useRef(0);
  const press = (): void => {
    if (pressing.current) clearTimeout(pressing.current);
    else p.onBegin?.();
    pressing.current = window.setTimeout(released, 700);
  };
  const released = (): void => {
    if (!pressing.current) return;
    clearTimeout(pressing.current);
    pressing.current = 0;
    p.onEnd?.();
  };
  const toNotch = (v: number): number => {
    const x = Math.min(b, Math.max(a, v));
    return Math.round(notches * (p.log ? Math.log(x / a) / Math.log(b / a) : (x - a) / (b - a)));
  };
  const fromNotch = (n: number): number => {
    const t = n / notches;
    const v = p.log ? a * (b / a) ** t : a + t * (b - a);
    const step = p.log ? 10 ** (Math.floor(Math.log10(v)) - 1) : p.step;
    const snapped = Math.round(v / (p.whole ? Math.max(1, step) : step)) * (p.whole ? Math.max(1, step) : step);
    return Number(Math.min(b, Math.max(a, snapped)).toPrecision(12));
  };
  const enter = (raw: string): void => {
    setText(raw);
    const percent = p.high === 1 && /%\s*$/.test(raw);
    const v = Number(raw.replace(/,/g, "").replace(percent ? /%\s*$/ : /$^/, "")) / (percent ? 100 : 1);
    if (raw.trim() === "" || !Number.isFinite(v)) setFault(`“${raw}” is not a number; ${typed(p.value, p.step)} is kept.`);
    else if (v < p.low || v > p.high || (p.open && v === p.low)) setFault(`It must be ${p.open ? "above" : "at least"} ${p.low.toLocaleString("en")} and at most ${p.high.toLocaleString("en")}; ${typed(p.value, p.step)} is kept.`);
    else if (p.whole && !Number.isInteger(v)) setFault(`It must be a whole number; ${typed(p.value, p.step)} is kept.`);
    else {
      setFault(undefined);
      p.onChange(v);
    }
  };
  return (
    <div class="slider">
      <label for={`${id}n`} id={`${id}l`}>{p.label}</label>
      <input
        type="range" min={0} max={notches} value={toNotch(p.value)} aria-labelledby={`${id}l`} aria-valuetext={`${typed(p.value, p.step)} ${p.unit ?? ""}`}
        onPointerDown={p.onBegin} onPointerUp={p.onEnd} onPointerCancel={p.onEnd} onBlur={released}
        onKeyDown={(e) => {
          if (/^(Arrow|Page|Home|End)/.test(e.key)) press();
          const by = { ArrowRight: 1, ArrowUp: 1, ArrowLeft: -1, ArrowDown: -1, PageUp: 10, PageDown: -10 }[e.key];
          if (!by || p.log) return;
          e.preventDefault();
          const v = Math.round((p.value + by * p.step) / p.step) * p.step;
          setText(undefined);
          setFault(undefined);
          p.onChange(Number(Math.min(p.high, Math.max(p.open ? p.low + p.step : p.low, v)).toPrecision(12)));
        }}
        onInput={(e) => {
          setText(undefined);
          setFault(undefined);
          const v = fromNotch(Number(e.currentTarget.value));
          p.onChange(p.open && v <= p.low ? p.low + p.step : v);
        }}
      />
      <input
        id={`${id}n`} class="value" type="text" inputMode="decimal" autocomplete="off" value={text ?? typed(p.value, p.step)} aria-invalid={fault ? "true" : undefined} aria-describedby={`${id}h`}
        onFocus={p.onBegin} onInput={(e) => enter(e.currentTarget.value)} onBlur={() => { setText(undefined); setFault(undefined); p.onEnd?.(); }}
      />
      <span class="hint" id={`${id}h`}>{fault ? <span class="fault" role="alert">{fault}</span> : <>{p.unit ? `${p.unit}; ` : ""}{p.help}</>}</span>
    </div>
  );
}

/** A number in a table. What cannot be is said, and the last good value comes back. */
export function NumberCell(p: { label: string; value: number; low: number; high: number; open?: boolean; strict?: boolean; onChange: (v: number) => void }): JSX.Element {
  const id = useId();
  const [text, setText] = useState<string | undefined>(undefined);
  const [fault, setFault] = useState<string | undefined>(undefined);
  const enter = (raw: string): void => {
    setText(raw);
    const v = Number(raw.replace(/,/g, "").replace("−", "-"));
    const low = p.open || p.strict ? v > p.low : v >= p.low, high = p.strict ? v < p.high : v <= p.high;
    if (raw.trim() === "" || !Number.isFinite(v)) setFault(`“${raw}” is not a number.`);
    else if (!low || !high) setFault(`It must be ${p.open || p.strict ? "above" : "at least"} ${p.low.toLocaleString("en")} and ${p.strict ? "below" : "at most"} ${p.high.toLocaleString("en")}.`);
    else {
      setFault(undefined);
      p.onChange(v);
    }
  };
  return (
    <>
      <input
        type="text" inputMode="decimal" autocomplete="off" aria-label={p.label} value={text ?? String(Number(p.value.toPrecision(6)))} aria-invalid={fault ? "true" : undefined} aria-describedby={fault ? id : undefined}
        onInput={(e) => enter(e.currentTarget.value)} onBlur={() => { setText(undefined); setFault(undefined); }}
      />
      {fault && <span class="fault" role="alert" id={id}>{fault}</span>}
    </>
  );
}

export function Check(p: { label: string; value: boolean; help?: string; onChange: (v: boolean) => void }): JSX.Element {
  const id = useId();
  return (
    <div class="check">
      <input type="checkbox" id={id} checked={p.value} onChange={(e) => p.onChange(e.currentTarget.checked)} />
      <label for={id}>{p.label}</label>
      {p.help && <span class="hint">{p.help}</span>}
    </div>
  );
}

/** A text that is as high as what it holds. */
export function Text(p: { label: string; value: string; most: number; rows?: number; class?: string; placeholder?: string; onBegin?: () => void; onEnd?: () => void; onChange: (v: string) => void }): JSX.Element {
  const ref = useRef<HTMLTextAreaElement>(null);
  useEffect(() => {
    const el = ref.current;
    if (!el) return;
    el.style.height = "auto";
    el.style.height = `${el.scrollHeight}px`;
  }, [p.value]);
  return (
    <textarea
      ref={ref} class={p.class} rows={p.rows ?? 1} maxLength={p.most} value={p.value} aria-label={p.label} placeholder={p.placeholder} spellcheck={false}
      onFocus={p.onBegin} onBlur={p.onEnd} onInput={(e) => p.onChange(e.currentTarget.value)}
    />
  );
}

export function Progress(p: { what: string; done: number; left?: string; onCancel: () => void }): JSX.Element {
  const id = useId();
  return (
    <div class="progress" role="status">
      <span id={id}>{p.what}{p.left ? `, about ${p.left} left` : ""}</span>
      <progress max={1} value={p.done} aria-labelledby={id} />
      <button type="button" onClick={p.onCancel}>Cancel</button>
    </div>
  );
}

/** A dialog of the page: modal, closed by Escape, the focus goes back to where it was. */
export function Modal(p: { title: string; wide?: boolean; onClose: () => void; children: ComponentChildren }): JSX.Element {
  const ref = useRef<HTMLDialogElement>(null);
  const id = useId();
  useEffect(() => {
    const before = document.activeElement;
    ref.current?.showModal();
    return () => { if (before instanceof HTMLElement) before.focus(); };
  }, []);
  return (
    <dialog ref={ref} class={p.wide ? "wide" : undefined} aria-labelledby={id} onClose={p.onClose} onCancel={p.onClose}>
      <header>
        <h2 id={id}>{p.title}</h2>
        <button type="button" class="icon" aria-label="Close" onClick={() => ref.current?.close()}>×</button>
      </header>
      {p.children}
    </dialog>
  );
}
