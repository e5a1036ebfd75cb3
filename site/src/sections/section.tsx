// What sections share: their frame, and what a drag is.
import type { ComponentChildren, JSX } from "preact";
import { beginDrag, endDrag } from "../state/document";
import { solved } from "../state/results";
import type { Solved } from "../state/types";
import { quick } from "../state/view";

export const begin = (): void => { beginDrag(); quick.value = true; };
export const end = (): void => { endDrag(); quick.value = false; };

export const standing = (): Solved | undefined => solved.value?.value;

export function Section(p: { id: string; title: string; aside?: ComponentChildren; children: ComponentChildren }): JSX.Element {
  return (
    <section id={p.id} aria-labelledby={`${p.id}-title`}>
      <header><h3 id={`${p.id}-title`}>{p.title}</h3>{p.aside && <span class="aside">{p.aside}</span>}</header>
      {p.children}
    </section>
  );
}
