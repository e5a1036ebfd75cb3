// Bundles the page and both modules into one file, dist/preponder.html. The same input gives the same bytes.
import { build } from "esbuild";
import { createHash } from "node:crypto";
import { mkdirSync, readFileSync, writeFileSync } from "node:fs";
import { gzipSync } from "node:zlib";

const here = (p) => new URL(p, import.meta.url);
const read = (p) => readFileSync(here(p), "utf8");

async function bundle(entry) {
  const r = await build({
    entryPoints: [here(entry).pathname], bundle: true, minify: !process.env.PLAIN, write: false, format: "iife", target: "es2022", charset: "utf8", legalComments: "none",
    jsx: "automatic", jsxImportSource: "preact", define: { "process.env.NODE_ENV": '"production"' },
  });
  return r.outputFiles[0].text.trim();
}

const packed = (name) => gzipSync(readFileSync(here(`build/${name}.wasm`)), { level: 9 }).toString("base64");
// A closing tag inside a script would end it.
const inline = (text) => text.replaceAll("</script", "<\\/script").replaceAll("<!--", "<\\!--");
const hash = (text) => `'sha256-${createHash("sha256").update(text, "utf8").digest("base64")}'`;

const exec = inline(read("build/wasm_exec.js").trim());
const main = inline(await bundle("src/main.tsx"));
const worker = inline(await bundle("src/engine/worker.ts"));
const style = (await build({ entryPoints: [here("styles/page.css").pathname], bundle: true, minify: true, write: false })).outputFiles[0].text.trim();
const policy = [
  "default-src 'none'", `script-src ${hash(main)} ${hash(exec)} 'wasm-unsafe-eval'`, "worker-src blob:", "style-src 'unsafe-inline'", "img-src data: blob:", "connect-src 'none'", "frame-src 'none'",
  "object-src 'none'", "media-src 'none'", "font-src 'none'", "base-uri 'none'", "form-action 'none'",
].join("; ");

const parts = { POLICY: policy, STYLE: style, EXEC: exec, WORKER: worker, ENGINE: packed("engine"), STAGE: packed("stage"), MAIN: main };
const page = read("index.html").replace(/%([A-Z]+)%/g, (whole, name) => parts[name] ?? whole);
mkdirSync(here("dist"), { recursive: true });
writeFileSync(here("dist/preponder.html"), page);
const size = Buffer.byteLength(page);
console.log(`site/dist/preponder.html: ${(size / 1e6).toFixed(2)} MB`);
if (size > 6e6) {
  console.error("the page is larger than 6 MB");
  process.exit(1);
}
