// Which folder of the page may import which: architecture as data, like sim/deps_test.go.
import assert from "node:assert/strict";
import { readdirSync, readFileSync } from "node:fs";
import { test } from "node:test";

const allowed: Record<string, string[]> = {
  engine: [],
  words: [],
  state: ["engine", "words"],
  charts: ["words", "state/types"],
  controls: ["words"],
  sections: ["state", "charts", "controls", "words"],
  entries: ["state", "sections", "controls", "words"],
  stage: ["engine", "state", "words"],
  dialogs: ["engine", "state", "charts", "controls", "words"],
  ".": ["dialogs", "engine", "entries", "sections", "stage", "state", "words"],
};

const src = `${process.env["ROOT"]}/site/src`;

test("imports between folders are those of the list", () => {
  const used = new Set<string>();
  for (const folder of Object.keys(allowed)) {
    for (const name of readdirSync(`${src}/${folder}`).filter((n) => /\.tsx?$/.test(n))) {
      const text = readFileSync(`${src}/${folder}/${name}`, "utf8");
      for (const [, path] of text.matchAll(/from "(\.\.?\/[^"]+)"/g)) {
        const target = new URL(path!, `file:///src/${folder === "." ? "" : `${folder}/`}${name}`).pathname.replace("/src/", "");
        const to = target.includes("/") ? target.split("/")[0]! : ".";
        if (to === folder) continue;
        const rule = (allowed[folder] ?? []).find((r) => r === to || r === target);
        assert.ok(rule, `${folder}/${name} may not import ${target}`);
        used.add(`${folder} ${rule}`);
      }
    }
  }
  for (const [folder, rules] of Object.entries(allowed)) for (const r of rules) assert.ok(used.has(`${folder} ${r}`), `${folder} does not import ${r} any more`);
});

test("workers, storage and the network have one home each", () => {
  const homes: [RegExp, RegExp][] = [
    [/\bnew Worker\(|WebAssembly\.instantiate|postMessage\(/, /^engine\//],
    [/\blocalStorage\b|\blocation\.(hash|href)/, /^state\/storage/],
    [/\bfetch\(|XMLHttpRequest|WebSocket|sendBeacon|EventSource/, /^$/],
  ];
  for (const folder of Object.keys(allowed)) {
    for (const name of readdirSync(`${src}/${folder}`).filter((n) => /\.tsx?$/.test(n))) {
      const path = folder === "." ? name : `${folder}/${name}`;
      const text = readFileSync(`${src}/${path}`, "utf8");
      for (const [what, home] of homes) if (what.test(text)) assert.match(path, home, `${what} in ${path}`);
    }
  }
});
