// How things are looked at; nothing of this is part of the casebook.
import { effect, signal } from "@preact/signals";
import { prefer, preference } from "./storage";
import type { MemberReport } from "./types";
import type { Said } from "../engine/stage";

export type Theme = "light" | "dark";

const wanted = preference("theme");
export const theme = signal<Theme>(wanted === "light" || wanted === "dark" ? wanted : matchMedia("(prefers-color-scheme: dark)").matches ? "dark" : "light");
export const still = signal(matchMedia("(prefers-reduced-motion: reduce)").matches);
export const projector = signal(false);
export const arrival = signal(false);
export const shown = signal(0); // members on show
export const playing = signal(false);
export const speed = signal(1);
export const zoom = signal({ zoom: 1, x: 0, y: 0 });
export const hover = signal(-1);
export const follow = signal(-1);
export const quick = signal(false); // something is being dragged
export const lawAxis = signal<"energy" | "fitness">("energy");
export const said = signal<Said | undefined>(undefined);
export const stageFault = signal<string | undefined>(undefined);
export const memberReport = signal<{ member: number; report: MemberReport } | undefined>(undefined);

export type Dialog = "log" | "share" | "open" | "shelf" | undefined;
export const dialog = signal<Dialog>(undefined);

export function watchTheme(): void {
  effect(() => {
    document.documentElement.dataset.theme = theme.value;
  });
  effect(() => {
    document.documentElement.dataset.view = projector.value ? "projector" : "page";
  });
}

export function switchTheme(): void {
  theme.value = theme.peek() === "light" ? "dark" : "light";
  prefer("theme", theme.peek());
}
