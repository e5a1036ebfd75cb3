// Sharing, opening, and the casebooks kept in this browser.
import { signal } from "@preact/signals";
import type { JSX } from "preact";
import { useEffect, useRef, useState } from "preact/hooks";
import { download } from "../charts/figure";
import { Check, Modal } from "../controls/controls";
import { column } from "../engine/wire";
import { doc, openBook, say, tables } from "../state/document";
import { engines, sentenceOf } from "../state/results";
import { addressWith, drop, shelf, stored } from "../state/storage";
import type { Casebook } from "../state/types";
import { dialog } from "../state/view";

const close = (): void => { dialog.value = undefined; };
const withNames = signal(false);

/** Copies a text; a selected field is left where the browser forbids it. */
async function copy(text: string, field: HTMLTextAreaElement | null): Promise<boolean> {
  try {
    await navigator.clipboard.writeText(text);
    return true;
  } catch {
    field?.select();
    return document.execCommand("copy");
  }
}

export function ShareDialog(): JSX.Element {
  const d = doc.value;
  const [made, setMade] = useState<{ code: string; holds: string } | undefined>(undefined);
  const [problem, setProblem] = useState<string | undefined>(undefined);
  const field = useRef<HTMLTextAreaElement>(null);
  const names = withNames.value;
  useEffect(() => {
    if (!d) return;
    engines.main.ask<{ code: string; holds: string }>("encode", { casebook: d.book, names }).then((r) => { setMade(r.body); setProblem(undefined); }, (e: unknown) => setProblem(sentenceOf(e)));
  }, [d, names]);
  const link = made ? addressWith(made.code, d?.keys.indexOf(d.open) ?? 0) : "";
  const done = async (what: string, text: string): Promise<void> => say((await copy(text, field.current)) ? `${what} copied.` : "The browser did not let it be copied; select it and copy it by hand.");
  return (
    <Modal title="Link and code" wide onClose={close}>
      {problem && <p class="fault" role="alert">{problem}</p>}
      {made && <p id="share-holds">It holds {made.holds}. Whoever has it can read that.</p>}
      {d?.book.evidence?.named && <Check label="Put the names of the largest members in" value={names} help="off: members by order of arrival" onChange={(v) => (withNames.value = v)} />}
      <label class="field">Link <textarea ref={field} id="share-link" readOnly rows={4} value={link} spellcheck={false} /></label>
      <label class="field">Code alone, to paste under “Open” <textarea id="share-code" readOnly rows={3} value={made?.code ?? ""} spellcheck={false} /></label>
      <p class="buttons">
        <button type="button" class="primary" disabled={!made} onClick={() => void done("Link", link)}>Copy link</button>
        <button type="button" disabled={!made} onClick={() => void done("Code", made?.code ?? "")}>Copy code</button>
        <button type="button" onClick={() => void saveFile(names)}>Save a case file</button>
      </p>
    </Modal>
  );
}

export async function saveFile(names = true): Promise<void> {
  const d = doc.peek();
  if (!d) return;
  try {
    const r = await engines.main.ask("file", { casebook: d.book, names });
    const bytes = column<Uint8Array<ArrayBuffer>>(r, "file");
    if (bytes) download(`${(d.book.title || "casebook").toLowerCase().replace(/[^a-z0-9]+/g, "-")}.json`, bytes, "application/json");
  } catch (e) {
    const s = sentenceOf(e);
    if (s) say(s);
  }
}

/** Opens a code or a case file; a failure is a sentence and what was open stays. */
export async function openCode(code: string): Promise<string | undefined> {
  try {
    const r = await engines.main.ask<{ casebook: Casebook }>("decode", { code });
    openBook(r.body.casebook, Number(/&entry=(\d+)/.exec(code)?.[1] ?? 1) - 1);
    return undefined;
  } catch (e) {
    return sentenceOf(e);
  }
}

async function openFile(f: File): Promise<string | undefined> {
  try {
    const r = await engines.main.ask<{ casebook: Casebook }>("open", {}, { columns: [{ name: "file", data: new Uint8Array(await f.arrayBuffer()) }] });
    openBook(r.body.casebook);
    return undefined;
  } catch (e) {
    return sentenceOf(e);
  }
}

export function OpenDialog(): JSX.Element {
  const [problem, setProblem] = useState<string | undefined>(undefined);
  const [code, setCode] = useState("");
  const after = (s: string | undefined): void => {
    setProblem(s);
    if (!s) {
      close();
      say("Opened. The casebook before is kept under “Casebooks”.");
    }
  };
  return (
    <Modal title="Open a casebook" onClose={close}>
      {problem && <p class="fault" role="alert">{problem} The casebook that is open stays.</p>}
      <label class="field">Case file <input type="file" accept=".json,application/json" onChange={(e) => { const f = e.currentTarget.files?.[0]; if (f) void openFile(f).then(after); }} /></label>
      <label class="field">Code or link <textarea id="open-code" rows={4} value={code} spellcheck={false} onInput={(e) => setCode(e.currentTarget.value)} /></label>
      <p class="buttons"><button type="button" class="primary" onClick={() => void openCode(code).then(after)}>Open the code</button></p>
    </Modal>
  );
}

export function ShelfDialog(): JSX.Element {
  const [list, setList] = useState(shelf);
  const now = doc.value?.id;
  const demo = tables.value;
  return (
    <Modal title="Casebooks in this browser" onClose={close}>
      <ul class="shelf">
        {list.map((s) => (
          <li key={s.id}>
            <span><strong>{s.title}</strong><small>{s.id === now ? "open" : new Date(s.at).toLocaleString()}</small></span>
            <button type="button" disabled={s.id === now} aria-label={`Open ${s.title}`} onClick={() => { const b = stored(s.id); if (b) { openBook(b.book, b.open, s.id); close(); } }}>Open</button>
            <button type="button" disabled={s.id === now} aria-label={`Delete ${s.title}`} onClick={() => { drop(s.id); setList(shelf()); }}>Delete</button>
          </li>
        ))}
      </ul>
      <p class="buttons">
        <button type="button" onClick={() => { if (demo) { openBook(demo.demo, demo.demoOpen); close(); } }}>Open the Larkmoor demo afresh</button>
        <button type="button" onClick={() => { if (demo) { openBook({ casebook: 1, title: "New casebook", entries: [{ ...demo.newEntry, title: "As it is" }], evidence: null }); close(); } }}>Start an empty casebook</button>
      </p>
    </Modal>
  );
}
