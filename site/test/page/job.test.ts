// The main job, outside in: open, drag, read a log, look forward, hand over.
import assert from "node:assert/strict";
import { execFileSync } from "node:child_process";
import { writeFileSync } from "node:fs";
import { join } from "node:path";
import { after } from "node:test";
import { closeBrowser, command, drawn, folder, open, pageTest, put, sampleLog, says, text, watch } from "../harness";

after(closeBrowser);

pageTest("the demo opens on a verdict that the command gives too", {}, async ({ page }) => {
  await drawn(page);
  assert.equal(await text(page, ".stage h2"), "Condensate");
  assert.match(await text(page, "#standing .verdict"), /the fittest few together keep 68 % of all links/);
  assert.equal(await page.locator(".folded").count(), 3);
  await says(page, ".folded >> nth=0", /The fit get richer\. M0 leads with/);
  await says(page, ".folded >> nth=2", /Condensate, shared/);
  const solved = command(["solve", put("one.json", '{"casebook":1,"entries":[{"sharpness":3}]}')]);
  assert.equal(await text(page, "#standing dl div:nth-child(4) dd"), `${(solved["margin"] as number).toPrecision(3)} condensate below 1`);
  const grown = command(["grow", put("one.json", '{"casebook":1,"entries":[{"sharpness":3}]}')]) as { leader: { id: string; share: number } };
  assert.equal(await text(page, ".readout .lead dd"), `${grown.leader.id} ${(100 * grown.leader.share).toFixed(0)} %`);
});

pageTest("dragging sharpness across the critical point changes verdict and picture while the drag goes on", {}, async ({ page }) => {
  await drawn(page);
  const picture = async (): Promise<string> => (await page.locator(".picture").screenshot()).toString("base64");
  const before = await picture();
  const box = await page.getByRole("slider", { name: "Sharpness β" }).boundingBox();
  assert.ok(box);
  const at = (v: number): number => box.x + 9 + (v / 10) * (box.width - 18);
  const y = box.y + box.height / 2;
  await page.mouse.move(at(3), y);
  await page.mouse.down();
  await page.mouse.move(at(2), y, { steps: 5 });
  await page.mouse.move(at(0.9), y, { steps: 5 });
  await says(page, ".stage h2", /^The fit get richer$/);
  await says(page, ".readout .lead dd", /M0 \d\.\d %/);
  const during = await picture();
  assert.notEqual(during, before);
  await page.mouse.move(at(5), y, { steps: 8 });
  await says(page, "#standing .verdict", /keep 8\d % of all links/);
  await page.mouse.up();
  // The whole drag is one step of undo.
  await page.getByRole("button", { name: "Undo" }).click();
  await says(page, "#standing .verdict", /keep 68 % of all links/);
  await page.getByRole("button", { name: "Redo" }).click();
  await says(page, "#standing .verdict", /keep 8\d % of all links/);
});

pageTest("a log with two broken rows, from file to brief and to a fresh profile", {}, async ({ page, context, trouble }) => {
  await drawn(page);
  const rows = sampleLog().split("\r\n");
  rows.splice(500, 0, "2O24,M900,M3", "7,M901");
  const path = put("exchange.csv", rows.join("\r\n"));
  await page.getByRole("button", { name: "Read a log" }).first().click();
  await page.getByLabel("Drop a file here, or choose one").setInputFiles(path);
  await page.getByRole("button", { name: "Read the log" }).click();
  await says(page, "#log-problems", /2 of 10,000 rows cannot be used/);
  const problems = await text(page, ".problems");
  assert.match(problems, /1 because the time is neither a number nor an ISO 8601 date:\s*line 501: 2O24, M900, M3/);
  assert.match(problems, /1 because a field is missing:\s*line 502: 7, M901/);
  await page.getByRole("button", { name: "Leave them out and go on" }).click();
  await says(page, "#evidence-verdict", /^Heading for a condensate\. .*the fittest few together keep \d+ to \d+ %/);
  const said = command(["read", path]) as { margin: { estimate: number }; leader: { id: string } };
  const figures = await text(page, "#evidence-figures");
  assert.match(figures, new RegExp(`Leader${said.leader.id} `));
  assert.match(figures, new RegExp(`Margin${said.margin.estimate.toPrecision(3)} `));
  assert.match(await text(page, "#evidence"), /× [\d.]+ for arriving early × [\d.]+ for being good/);
  assert.match(await text(page, "#evidence .caution"), /does not define a market/);

  // An outlook that is cancelled keeps what was made; one that runs gives the sentences.
  await page.locator("#outlook").getByRole("textbox", { name: "Runs" }).fill("3000");
  await page.getByRole("button", { name: "Run the outlook" }).click();
  await says(page, "#outlook .progress", /[1-9]\d* of 3000 runs made, about .* left/);
  await page.locator("#outlook").getByRole("button", { name: "Cancel" }).click();
  await says(page, ".toast", /Outlook cancelled; the \d+ runs made so far are shown/);
  await says(page, "#outlook", /Partial: \d+ of 3,?000 runs/);
  await page.locator("#outlook").getByRole("textbox", { name: "Runs" }).fill("40");
  await page.getByRole("button", { name: "Run again" }).click();
  await says(page, "#outlook header", /40 runs/);
  await page.getByRole("button", { name: "Run again" }).waitFor();
  // Another limit counts the same runs anew, at once.
  await page.locator("#outlook").getByRole("textbox", { name: "Limit" }).fill("90 %");
  await says(page, "#outlook-says", /It passes 90 % in 0 % of runs/);
  await page.locator("#outlook").getByRole("textbox", { name: "Limit" }).fill("0.2");
  const outlook = await says(page, "#outlook-says", /At 20,000 members the leader holds .*It passes 20 % in .*Today's leader still leads/);

  // The link, in a fresh profile: the same numbers to the last digit.
  await page.getByRole("button", { name: "Share", exact: true }).first().click();
  await says(page, "#share-holds", /members by order of arrival, no name and no single link/);
  const link = await page.locator("#share-link").inputValue();
  await page.keyboard.press("Escape");
  // The standing: its sentence, its figures, and every digit of what was counted.
  const standingOf = async (p: typeof page): Promise<string> => {
    await p.getByLabel("Table: Links held n(ε)").click();
    return (await text(p, "#standing .verdict")) + (await text(p, "#standing dl")) + (await text(p, "#standing table"));
  };
  const standing = await standingOf(page);
  const evidence = (await text(page, "#evidence-figures")) + (await text(page, "#evidence-verdict"));
  const table = async (p: typeof page): Promise<string> => {
    await p.getByLabel("Table: Leader's share from today to the planned size").click();
    return text(p, "#outlook table");
  };
  const numbers = await table(page);
  const second = await open({ hash: link.slice(link.indexOf("#")) });
  watch(second.page, trouble);
  await drawn(second.page);
  assert.equal(await standingOf(second.page), standing);
  assert.ok(standing.length > 500);
  await says(second.page, "#evidence-verdict", /Heading for a condensate/);
  assert.equal((await text(second.page, "#evidence-figures")) + (await text(second.page, "#evidence-verdict")), evidence);
  await second.page.getByRole("button", { name: "Run the outlook" }).click();
  await second.page.getByRole("button", { name: "Run again" }).waitFor({ timeout: 60000 });
  assert.equal(await text(second.page, "#outlook-says"), outlook);
  assert.equal(await table(second.page), numbers);
  await second.context.close();

  // The brief.
  await page.waitForFunction(() => document.querySelector(".paper img") !== null && document.querySelector(".paper .code") !== null);
  const pdf = join(folder(), "brief.pdf");
  writeFileSync(pdf, await page.pdf({ format: "A4", printBackground: true, preferCSSPageSize: true }));
  const paper = execFileSync("pdftotext", ["-layout", pdf, "-"], { encoding: "utf8" }).replace(/\s+/g, " ");
  assert.match(paper, /Heading for a condensate/);
  assert.match(paper, /Caution\. A screening model: it does not define a market/);
  assert.match(paper, /At 20,000 members the leader holds/);
  assert.match(paper, /What is assumed/);
  assert.match(paper, /Opens again by this code/);
  assert.match(execFileSync("pdfinfo", [pdf], { encoding: "utf8" }), /Pages:\s+1\b/);
  assert.ok(context);
});

pageTest("a reload loses nothing", {}, async ({ page }) => {
  await drawn(page);
  await page.getByLabel("Title of the entry").fill("My own title");
  await page.getByLabel("Note").fill("A note");
  await page.getByRole("button", { name: "Duplicate My own title" }).click();
  await says(page, ".kept", /kept in this browser/);
  await page.reload();
  await drawn(page);
  assert.equal(await page.getByLabel("Title of the entry").inputValue(), "My own title, changed");
  await says(page, ".casebook > header", /5 entries/);
});

pageTest("entries: add, duplicate, move, rename, fold, remove, undo", {}, async ({ page }) => {
  await drawn(page);
  const titles = async (): Promise<string[]> => page.locator("article").evaluateAll((all) => all.map((a) => a.querySelector<HTMLTextAreaElement>("textarea.title")?.value ?? a.querySelector("strong")?.textContent ?? ""));
  const first = await titles();
  await page.getByRole("button", { name: "Add an entry" }).click();
  assert.deepEqual(await titles(), [...first, "New entry"]);
  await page.getByLabel("Title of the entry").fill("Renamed");
  await page.getByRole("button", { name: "Move Renamed up" }).click();
  assert.deepEqual(await titles(), [...first.slice(0, 3), "Renamed", first[3]]);
  await page.getByRole("button", { name: "Duplicate Renamed" }).click();
  assert.deepEqual(await titles(), [...first.slice(0, 3), "Renamed", "Renamed, changed", first[3]]);
  await page.getByRole("button", { name: "Remove Renamed, changed" }).click();
  await says(page, ".toast", /“Renamed, changed” removed/);
  await page.locator(".toast").getByRole("button", { name: "Undo" }).click();
  assert.equal((await titles()).length, 6);
  await page.getByRole("button", { name: "Fold Renamed, changed" }).click();
  assert.equal(await page.locator(".unfolded").count(), 0);
  await page.locator(".unfold").first().click();
  await says(page, ".stage h2", /The fit get richer/);
});

pageTest("play, scrub, arrangement, hover, follow", {}, async ({ page }) => {
  await drawn(page);
  const scrubber = page.getByRole("slider", { name: "Members on show" });
  await scrubber.focus();
  await page.keyboard.press("Home");
  await says(page, ".readout", /Members10/);
  await page.getByRole("button", { name: "Play" }).click();
  await says(page, ".readout", /Members[1-9]\d\D/);
  await page.getByRole("button", { name: "Pause" }).click();
  await page.getByRole("button", { name: "To the end" }).click();
  await says(page, ".readout", /Members5,000/);
  const leader = await text(page, ".readout .lead dd");
  await page.getByRole("button", { name: "By arrival" }).click();
  await says(page, ".ruler", /first to arrive/);
  await page.getByRole("button", { name: "By level" }).click();
  const overlay = page.locator(".overlay");
  await overlay.focus();
  await page.keyboard.press("ArrowRight");
  await says(page, ".card", new RegExp(`^${leader.split(" ")[0]}links in[\\d,]+, ${leader.split(" ")[1]} %rank1 of 5,000`));
  await page.keyboard.press("ArrowRight");
  await says(page, ".card", /rank2 of 5,000/);
  await page.keyboard.press("Escape");
  await page.locator(".card").waitFor({ state: "detached" });
  // The pointer finds the leader under its own dot, beside its plate.
  const plate = await page.locator(".plate").boundingBox();
  const host = await overlay.boundingBox();
  assert.ok(plate && host);
  for (const dx of [-20, -26, 20, 26]) {
    await page.mouse.move(dx < 0 ? plate.x + dx : plate.x + plate.width - 6 + dx, plate.y + plate.height / 2);
    await page.waitForTimeout(150);
    if (await page.locator(".card").count()) break;
  }
  await says(page, ".card", /rank/);
});

pageTest("the stage rests when nothing moves", {}, async ({ page }) => {
  await drawn(page);
  await page.waitForTimeout(1500);
  const frames = await page.evaluate(async () => {
    const w = document.querySelector("iframe")!.contentWindow! as Window & typeof globalThis;
    let calls = 0;
    const real = w.WebGL2RenderingContext.prototype.drawElements;
    w.WebGL2RenderingContext.prototype.drawElements = function (...a: Parameters<typeof real>) { calls++; return real.apply(this, a); };
    await new Promise((r) => setTimeout(r, 1500));
    return calls;
  });
  assert.equal(frames, 0);
});
