// The casebook: evidence, then the entries, folded to a mark, a title and a verdict, or unfolded to their sections.
import type { JSX } from "preact";
import { useEffect, useRef } from "preact/hooks";
import { Text } from "../controls/controls";
import { addEntry, beginDrag, doc, duplicate, editEntry, endDrag, move, projection, remove, tables, unfold } from "../state/document";
import { markKey } from "../state/edges";
import { digests } from "../state/results";
import type { Entry } from "../state/types";
import { theme } from "../state/view";
import { number } from "../words/format";
import { Brief } from "../sections/brief";
import { EvidenceBlock } from "../sections/evidence";
import { LawSection } from "../sections/law";
import { LeversSection, OutlookSection, SharesSection, StandingSection } from "../sections/sections";

function Mark(p: { image: ImageData | undefined; size: number }): JSX.Element {
  const ref = useRef<HTMLCanvasElement>(null);
  useEffect(() => {
    const el = ref.current;
    if (!el || !p.image) return;
    el.width = p.image.width;
    el.height = p.image.height;
    el.getContext("2d")?.putImageData(p.image, 0, 0);
  }, [p.image]);
  return <canvas class="mark" ref={ref} width={8} height={8} style={{ width: `${p.size}px`, height: `${p.size}px` }} aria-hidden="true" />;
}

function Tools(p: { index: number; of: number; title: string }): JSX.Element {
  const name = p.title || "this entry";
  return (
    <div class="tools" role="group" aria-label={`Entry ${p.index + 1}`}>
      <button type="button" onClick={() => duplicate(p.index)} aria-label={`Duplicate ${name}`}>Duplicate</button>
      <button type="button" disabled={p.index === 0} onClick={() => move(p.index, -1)} aria-label={`Move ${name} up`}>Up</button>
      <button type="button" disabled={p.index === p.of - 1} onClick={() => move(p.index, 1)} aria-label={`Move ${name} down`}>Down</button>
      <button type="button" onClick={() => remove(p.index)} aria-label={`Remove ${name}`}>Remove</button>
    </div>
  );
}

function Folded(p: { entry: Entry; k: number }): JSX.Element {
  const d = doc.value;
  const digest = d && digests.value.get(markKey(projection(d.book, p.entry), theme.value));
  return (
    <article class="folded">
      <button type="button" class="unfold" aria-expanded={false} onClick={() => unfold(p.k)}>
        <Mark image={digest?.mark} size={56} />
        <span class="words"><strong>{p.entry.title || "Untitled entry"}</strong><span>{digest ? `${digest.heading}. ${digest.line}` : "Computing…"}</span></span>
        <span class="beta">β {number(p.entry.sharpness)}</span>
      </button>
    </article>
  );
}

function Unfolded(p: { entry: Entry; index: number; of: number; k: number }): JSX.Element {
  const limits = tables.value?.limits;
  const d = doc.value;
  const digest = d && digests.value.get(markKey(projection(d.book, p.entry), theme.value));
  return (
    <article class="unfolded" aria-label={p.entry.title || "Entry"}>
      <header>
        <div>
          <Text label="Title of the entry" class="title" value={p.entry.title} most={limits?.title ?? 200} placeholder="Untitled entry" onBegin={beginDrag} onEnd={endDrag} onChange={(v) => editEntry((e) => ({ ...e, title: v.replace(/\n/g, " ") }))} />
          <Text label="Note" class="note" value={p.entry.note} most={limits?.note ?? 10000} placeholder="Note: what this entry is about" onBegin={beginDrag} onEnd={endDrag} onChange={(v) => editEntry((e) => ({ ...e, note: v }))} />
        </div>
        <button type="button" class="fold" aria-expanded={true} aria-label={`Fold ${p.entry.title || "the entry"}`} onClick={() => unfold(p.k)}><Mark image={digest?.mark} size={56} /></button>
      </header>
      <Tools index={p.index} of={p.of} title={p.entry.title} />
      <LawSection entry={p.entry} />
      <StandingSection entry={p.entry} />
      <SharesSection />
      <OutlookSection entry={p.entry} />
      <LeversSection entry={p.entry} />
      <Brief />
    </article>
  );
}

export function CasebookList(): JSX.Element | null {
  const d = doc.value;
  if (!d) return null;
  const n = d.book.entries.length;
  return (
    <div class="casebook">
      <header><h2>Casebook</h2><span class="aside">{n === 1 ? "1 entry" : `${n} entries`}</span></header>
      <EvidenceBlock />
      {d.book.entries.map((e, i) => {
        const k = d.keys[i] ?? 0;
        return d.open === k ? <Unfolded key={k} entry={e} index={i} of={n} k={k} /> : <Folded key={k} entry={e} k={k} />;
      })}
      <p class="add"><button type="button" onClick={addEntry}>Add an entry</button></p>
    </div>
  );
}
