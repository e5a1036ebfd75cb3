// Opens the built file from file:// in headless Chromium. A test fails on any console error or warning, any page error,
// and any request but the file itself and its own blob: and data: addresses.
import assert from "node:assert/strict";
import { execFileSync } from "node:child_process";
import { mkdtempSync, rmSync, writeFileSync } from "node:fs";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { test } from "node:test";
import axe from "axe-core";
import { chromium, type Browser, type BrowserContext, type Page } from "playwright-core";

export const root = process.env["ROOT"] ?? "";
export const file = `file://${root}/site/dist/preponder.html`;

const flags = [
  "--headless", "--no-sandbox", "--disable-quic", "--no-first-run", "--disable-background-networking", "--disable-component-update", "--disable-sync",
  "--use-gl=angle", "--use-angle=swiftshader", "--enable-unsafe-swiftshader",
];

export interface Look {
  width?: number;
  height?: number;
  theme?: "light" | "dark";
  hash?: string;
  flags?: string[];
  still?: boolean;
}

export interface Session {
  page: Page;
  context: BrowserContext;
  /** What went wrong so far; a test that provokes something takes it out. */
  trouble: string[];
}

let browser: Browser | undefined;

/** Starts a browser; one that dies while it starts is started once more. */
async function launch(more: string[]): Promise<Browser> {
  const look = { executablePath: "/usr/bin/chromium", args: [...flags, ...more] };
  return chromium.launch(look).catch(() => chromium.launch(look));
}

async function launched(more: string[]): Promise<Browser> {
  if (more.length > 0) return launch(more);
  browser ??= await launch([]);
  return browser;
}

export async function closeBrowser(): Promise<void> {
  await browser?.close();
  browser = undefined;
}

/** Opens the page in a fresh profile. */
export async function open(look: Look = {}): Promise<Session> {
  const b = await launched(look.flags ?? []);
  const context = await b.newContext({ viewport: { width: look.width ?? 1440, height: look.height ?? 900 }, colorScheme: look.theme ?? "light", reducedMotion: look.still ? "reduce" : "no-preference", acceptDownloads: true });
  const page = await context.newPage();
  const trouble: string[] = [];
  watch(page, trouble);
  await page.addInitScript({ content: axe.source });
  await page.goto(file + (look.hash ?? ""));
  return { page, context, trouble };
}

export function watch(page: Page, trouble: string[]): void {
  page.on("console", (m) => { if (m.type() === "error" || m.type() === "warning" || m.text().startsWith("request ")) trouble.push(`console ${m.type()}: ${m.text()}`); });
  page.on("pageerror", (e) => trouble.push(`page error: ${e.message}`));
  page.on("request", (r) => { if (!r.url().startsWith(file) && !/^(blob|data|about):/.test(r.url())) trouble.push(`request: ${r.url()}`); });
}

/** A test on the page; it closes its profile and checks that nothing went wrong. */
export function pageTest(name: string, look: Look, body: (s: Session) => Promise<void>): void {
  test(name, async () => {
    const s = await open(look);
    try {
      await body(s);
      assert.deepEqual(s.trouble, []);
    } catch (e) {
      if (process.env["SHOTS"]) await s.page.screenshot({ path: join(process.env["SHOTS"], `${name.replace(/\W+/g, "-")}.png`) });
      throw e;
    } finally {
      const b = s.context.browser();
      await s.context.close();
      if (look.flags && b) await b.close();
    }
  });
}

/** The stage has painted and its labels stand. */
export async function drawn(page: Page): Promise<void> {
  await page.locator(".plate").waitFor({ timeout: 60000 });
}

/** Violations of WCAG 2.2 A and AA that axe-core finds. */
export async function violations(page: Page): Promise<string[]> {
  return page.evaluate(async () => {
    const found = await (window as unknown as { axe: typeof axe }).axe.run(document, { runOnly: ["wcag2a", "wcag2aa", "wcag21a", "wcag21aa", "wcag22aa", "best-practice"] });
    return found.violations.map((v) => `${v.id}: ${v.help} — ${v.nodes.slice(0, 3).map((n) => n.target.join(" ")).join("; ")}`);
  });
}

/** Answers of the command for the same thing. */
export function command(args: string[], input?: string): Record<string, unknown> {
  const out = execFileSync("go", ["run", "./sim/cmd/preponder", ...args], { cwd: root, input, encoding: "utf8", maxBuffer: 1 << 28 });
  return JSON.parse(out) as Record<string, unknown>;
}

export function sampleLog(): string {
  return execFileSync("go", ["run", "./sim/cmd/preponder", "sample"], { cwd: root, encoding: "utf8", maxBuffer: 1 << 28 });
}

/** A folder for one test's files, removed with the process. */
export function folder(): string {
  const dir = mkdtempSync(join(tmpdir(), "preponder-"));
  process.on("exit", () => rmSync(dir, { recursive: true, force: true }));
  return dir;
}

export function put(name: string, text: string): string {
  const path = join(folder(), name);
  writeFileSync(path, text);
  return path;
}

export const text = async (page: Page, selector: string): Promise<string> => ((await page.locator(selector).first().textContent()) ?? "").replace(/\s+/g, " ").trim();

/** Waits until a text matches. */
export async function says(page: Page, selector: string, what: RegExp, timeout = 120000): Promise<string> {
  const at = page.locator(selector).first();
  const end = Date.now() + timeout;
  for (;;) {
    const now = (await at.count()) ? ((await at.textContent()) ?? "").replace(/\s+/g, " ").trim() : "";
    if (what.test(now)) return now;
    if (Date.now() > end) assert.fail(`${selector} says “${now}”, not ${what}`);
    await page.waitForTimeout(50);
  }
}
