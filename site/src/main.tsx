// Mounts the page and starts the edges.
import { render, type JSX } from "preact";
import { effect } from "@preact/signals";
import { LogDialog } from "./dialogs/log";
import { OpenDialog, openCode, saveFile, ShareDialog, ShelfDialog } from "./dialogs/dialogs";
import { column } from "./engine/wire";
import { CasebookList } from "./entries/list";
import { briefCode, briefPicture, PrintedBrief } from "./sections/brief";
import { watchEvidence } from "./sections/evidence";
import { canRedo, canUndo, current, doc, edit, openBook, redo, say, tables, toast, undo, warn } from "./state/document";
import { connect } from "./state/edges";
import { openLogDialog, take } from "./state/log";
import { engines, grown, sentenceOf, solved, startEngines } from "./state/results";
import { clearAddress, codeInAddress, kept, last, onAddress, stored } from "./state/storage";
import type { Casebook, Tables } from "./state/types";
import { dialog, projector, said, switchTheme, theme, watchTheme } from "./state/view";
import { nameOf, StageView, type StageSource } from "./stage/stageview";
import { percent, count } from "./words/format";

const part = (id: string): string => document.getElementById(id)?.textContent ?? "";

/** Compiles a module from the page: base64 of gzip. */
async function moduleFrom(id: string): Promise<WebAssembly.Module> {
  // What stands behind this script in the page may not have been read yet.
  if (!document.getElementById(id)) await new Promise((resolve) => document.addEventListener("DOMContentLoaded", resolve, { once: true }));
  const text = part(id).trim();
  const letters = atob(text);
  const packed = new Uint8Array(letters.length);
  for (let i = 0; i < letters.length; i++) packed[i] = letters.charCodeAt(i);
  document.getElementById(id)?.remove();
  const plain = new Blob([packed]).stream().pipeThrough(new DecompressionStream("gzip"));
  return WebAssembly.compile(await new Response(plain).arrayBuffer());
}

const keptWords = { kept: "kept in this browser", changed: "keeping…", denied: "not kept: this browser denies storage. Save a case file" };

function Header(): JSX.Element {
  const d = doc.value;
  return (
    <header class="page">
      <svg class="sign" viewBox="-16 -16 32 32" aria-hidden="true"><circle r="15" class="rim" />{Array.from({ length: 11 }, (_, i) => <line key={i} x1="0" y1="0" x2={13 * Math.cos((i * 2 * Math.PI) / 11 + (i % 3) * 0.1)} y2={13 * Math.sin((i * 2 * Math.PI) / 11 + (i % 3) * 0.1)} />)}<circle r="4.5" class="core" /></svg>
      <h1><input type="text" class="booktitle" aria-label="Title of the casebook" value={d?.book.title ?? ""} maxLength={200} onInput={(e) => { const title = e.currentTarget.value; edit((b) => ({ ...b, title })); }} /></h1>
      <span class="kept" role="status">{keptWords[kept.value]}</span>
      <nav aria-label="Casebook">
        <button type="button" class="icon" disabled={!canUndo.value} onClick={undo} aria-label="Undo" title="Undo (Ctrl+Z)">↶</button>
        <button type="button" class="icon" disabled={!canRedo.value} onClick={redo} aria-label="Redo" title="Redo (Ctrl+Shift+Z)">↷</button>
        <button type="button" class="desk" onClick={openLogDialog}>Read a log</button>
        <button type="button" class="desk" onClick={() => (dialog.value = "share")}>Share</button>
        <button type="button" class="wide" onClick={() => (dialog.value = "open")}>Open</button>
        <button type="button" class="wide" onClick={() => void saveFile()}>Save</button>
        <button type="button" class="wide" onClick={() => (dialog.value = "shelf")}>Casebooks</button>
        <button type="button" class="wide" onClick={() => window.print()}>Print</button>
        <button type="button" class="wide" onClick={() => (projector.value = true)}>Projector</button>
        <button type="button" class="icon" onClick={switchTheme} aria-label={theme.value === "light" ? "Dark theme" : "Light theme"}>◐</button>
        <details class="more">
          <summary aria-label="More">⋯</summary>
          <div onClick={(e) => ((e.currentTarget.parentElement as HTMLDetailsElement).open = false)}>
            <button type="button" class="phone" onClick={openLogDialog}>Read a log</button>
            <button type="button" class="phone" onClick={() => (dialog.value = "share")}>Share</button>
            <button type="button" class="phone" disabled={!canRedo.value} onClick={redo}>Redo</button>
            <button type="button" onClick={() => (dialog.value = "open")}>Open</button>
            <button type="button" onClick={() => void saveFile()}>Save</button>
            <button type="button" onClick={() => (dialog.value = "shelf")}>Casebooks</button>
            <button type="button" onClick={() => window.print()}>Print</button>
            <button type="button" onClick={() => (projector.value = true)}>Projector</button>
          </div>
        </details>
      </nav>
    </header>
  );
}

function PhoneBar(): JSX.Element | null {
  const s = said.value;
  if (!s?.leader) return null;
  return (
    <aside class="phonebar" aria-label="In short">
      <span><strong>{nameOf(s.leader.member)} {percent(s.leader.share)}</strong><small>{solved.value?.value.verdict.heading} at {count(s.members)}</small></span>
      <button type="button" onClick={() => document.getElementById("stage")?.scrollIntoView({ behavior: "smooth" })}>Picture</button>
    </aside>
  );
}

function Page(p: { source: StageSource }): JSX.Element {
  return (
    <>
      <Header />
      <main>
        <CasebookList />
        <StageView source={p.source} />
      </main>
      <PhoneBar />
      {toast.value && <div class="toast" role="status">{toast.value.text}{toast.value.undo && <button type="button" onClick={undo}>Undo</button>}{toast.value.stays && <button type="button" onClick={() => (toast.value = undefined)}>Dismiss</button>}</div>}
      {dialog.value === "log" && <LogDialog />}
      {dialog.value === "share" && <ShareDialog />}
      {dialog.value === "open" && <OpenDialog />}
      {dialog.value === "shelf" && <ShelfDialog />}
      {projector.value && <button type="button" class="leave" onClick={() => (projector.value = false)}>Leave projector (Esc)</button>}
      <PrintedBrief />
    </>
  );
}

/** Opens the code in the address, else what was open last, else the demo. A code that fails leaves the other two. */
async function openFirst(t: Tables): Promise<void> {
  const code = codeInAddress();
  if (code !== undefined) {
    const problem = await openCode(code);
    clearAddress();
    if (!problem) {
      const id = last();
      if (id) say("Opened from the link. The casebook that was open before is kept under “Casebooks”.");
      return;
    }
    warn(`The link could not be opened. ${problem}`);
  }
  const id = last();
  const before = id ? stored(id) : undefined;
  if (id && before) {
    try {
      const file = new TextEncoder().encode(JSON.stringify(before.book));
      const r = await engines.main.ask<{ casebook: Casebook }>("open", {}, { columns: [{ name: "file", data: file }] });
      openBook(r.body.casebook, before.open, id);
      return;
    } catch (e) {
      warn(`The casebook kept in this browser cannot be opened: ${sentenceOf(e) ?? ""} It stays under “Casebooks”; the demo is shown.`);
    }
  }
  openBook(t.demo, t.demoOpen);
}

/** Picture and code for the brief, made when nothing else is asked. */
function prepareBrief(): void {
  let timer = 0;
  effect(() => {
    const g = grown.value;
    const c = current.value;
    const d = doc.value;
    clearTimeout(timer);
    if (!g || !c || !d) return;
    timer = window.setTimeout(() => {
      const size = 760;
      void engines.main.ask("picture", { width: size, height: size, scale: 1.6, members: g.value.members, theme: "paper", strokes: 5000, bare: false, ceiling: c.entry.growth.ceiling }).then((r) => {
        const rgba = column<Uint8Array<ArrayBuffer>>(r, "rgba");
        if (!rgba) return;
        const canvas = document.createElement("canvas");
        canvas.width = canvas.height = size;
        canvas.getContext("2d")?.putImageData(new ImageData(new Uint8ClampedArray(rgba), size, size), 0, 0);
        briefPicture.value = canvas.toDataURL("image/png");
      }, () => {});
      void engines.main.ask<{ code: string }>("encode", { casebook: d.book, names: false }).then((r) => { briefCode.value = r.body.code; }, () => (briefCode.value = undefined));
    }, 700);
  });
}

function keys(): void {
  window.addEventListener("keydown", (e) => {
    const typing = e.target instanceof HTMLInputElement && e.target.type === "text" || e.target instanceof HTMLTextAreaElement;
    if (e.key === "Escape" && projector.peek()) projector.value = false;
    if (typing || !(e.ctrlKey || e.metaKey) || e.key.toLowerCase() !== "z") return;
    e.preventDefault();
    (e.shiftKey ? redo : undo)();
  });
  // A log dropped anywhere is taken as one dropped in the dialog.
  window.addEventListener("dragover", (e) => e.preventDefault());
  window.addEventListener("drop", (e) => {
    if (e.defaultPrevented) return;
    e.preventDefault();
    openLogDialog();
    const f = e.dataTransfer?.files[0];
    if (f) void f.arrayBuffer().then((b) => take(f.name, new Uint8Array(b)));
  });
}

async function start(): Promise<void> {
  const exec = part("wasm-exec");
  startEngines({ script: `${exec}\n${part("worker")}`, module: moduleFrom("engine-wasm") });
  watchTheme();
  let stageModule: Promise<WebAssembly.Module> | undefined;
  const source = { script: exec, module: () => (stageModule ??= moduleFrom("stage-wasm")) };
  const root = document.getElementById("page");
  if (!root) return;
  try {
    tables.value = (await engines.main.ask<Tables>("tables", {})).body;
  } catch (e) {
    root.textContent = sentenceOf(e) ?? "The engine did not start. Reload the page, or try a current browser.";
    return;
  }
  connect();
  watchEvidence();
  prepareBrief();
  keys();
  await openFirst(tables.value);
  onAddress(() => {
    const code = codeInAddress();
    if (code === undefined) return;
    void openCode(code).then((problem) => (problem ? warn : say)(problem ? `The link could not be opened. ${problem}` : "Opened from the link. The casebook before is kept under “Casebooks”."));
    clearAddress();
  });
  root.replaceChildren();
  render(<Page source={source} />, root);
}

void start();
