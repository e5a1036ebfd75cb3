// Laws that are typed or drawn: Go says whether they can be used before they enter the casebook.
import { current, doc, editEntry, projection } from "./document";
import { engines, sentenceOf } from "./results";
import type { Law } from "./types";

/** Why a law cannot be used, and at which character of its formula (0: nowhere in particular). */
export interface LawFault {
  fault: string;
  at: number;
}

/** Takes a law into the open entry if it can be used; says why if not. Undefined also where a newer try has taken over. */
export async function tryLaw(law: Law): Promise<LawFault | undefined> {
  try {
    const r = await engines.side.askNewest<{ law?: Law } & Partial<LawFault>>("law", { law });
    if (!r) return undefined;
    if (r.body.fault !== undefined) return { fault: r.body.fault, at: r.body.at ?? 0 };
    editEntry((e) => ({ ...e, law }));
    return undefined;
  } catch (e) {
    return { fault: sentenceOf(e) ?? "", at: 0 };
  }
}

/** Turns the law of the open entry into a drawn one close to it. */
export async function drawOn(): Promise<void> {
  const d = doc.peek(), c = current.peek();
  if (!d || !c) return;
  const r = await engines.side.ask<{ knots: [number, number][] }>("sketch", { casebook: projection(d.book, c.entry), entry: 0 });
  editEntry((e) => ({ ...e, law: { family: "drawn", knots: r.body.knots } }));
}
