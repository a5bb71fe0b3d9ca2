// Pages made by the program itself, and a browser to open them in.
import { execFileSync } from "node:child_process";
import { mkdtempSync, readFileSync, writeFileSync } from "node:fs";
import { tmpdir } from "node:os";
import { dirname, join } from "node:path";
import { fileURLToPath, pathToFileURL } from "node:url";
import { chromium } from "playwright-core";

const root = join(dirname(fileURLToPath(import.meta.url)), "..", "..");
const ribband = process.env.RIBBAND || join(root, "target", "debug", "ribband");
const browserPath = process.env.CHROMIUM || "/usr/bin/chromium";

export const folder = mkdtempSync(join(tmpdir(), "ribband-pages-"));
export const demo = file => join(root, "fixtures", "demo", file);

/** Runs ribband; what it says is shown only when it fails. */
export function run(...words) {
  execFileSync(ribband, words, { stdio: ["ignore", "pipe", "pipe"] });
}

/** A page, its report, its program and its setup sheet, for one drawing. */
export function make(name, drawing, ...settings) {
  const [page, report, program, sheet] = ["html", "json", "nc", "sheet.html"].map(end => join(folder, `${name}.${end}`));
  const all = [drawing, "--depth", "6mm", "--drawing-unit", "mm", "--held", "vacuum", ...settings];
  run("post", ...all, "-o", program, "--report", report, "--setup-sheet", sheet);
  run("preview", ...all, "-o", page);
  return {
    url: pathToFileURL(page).href,
    sheet: pathToFileURL(sheet).href,
    page: readFileSync(page, "utf8"),
    report: JSON.parse(readFileSync(report, "utf8")),
    program: readFileSync(program, "utf8"),
  };
}

/** A drawing of our own for a test. */
export function drawing(name, text) {
  const path = join(folder, name);
  writeFileSync(path, text);
  return path;
}

export const launch = () => chromium.launch({ executablePath: browserPath, args: ["--no-sandbox"] });

/** Opens a page and keeps what it said, asked for and threw. */
export async function open(browser, url, options = {}) {
  const context = await browser.newContext({ viewport: { width: 1280, height: 800 }, ...options });
  const page = await context.newPage();
  const heard = [];
  page.on("console", message => heard.push(`console: ${message.text()}`));
  page.on("pageerror", error => heard.push(`error: ${error.message}`));
  page.on("dialog", dialog => { heard.push(`dialog: ${dialog.message()}`); dialog.dismiss(); });
  page.on("request", request => { if (request.url() !== url) heard.push(`request: ${request.url()}`); });
  await page.goto(url);
  await frames(page);
  return { page, heard, close: () => context.close() };
}

/** Waits until the page has been drawn. */
export const frames = page =>
  page.evaluate(() => new Promise(done => requestAnimationFrame(() => requestAnimationFrame(() => done()))));

/**
 * An independent reading of a program of plain G0 to G3 with I and J from the start: its moves, each with line, ends and
 * length.
 */
export function read(program) {
  const at = { X: 0, Y: 0, Z: 0 };
  const moves = [];
  let mode = null;
  program.split(/\r?\n/).forEach((text, index) => {
    const words = [...text.replace(/\([^)]*\)|;.*/g, "").matchAll(/([A-Z])\s*([-+]?[\d.]+)/g)].map(w => [w[1], Number(w[2])]);
    for (const [letter, value] of words) if (letter === "G" && value <= 3) mode = value;
    const said = Object.fromEntries(words);
    if (!("X" in said || "Y" in said || "Z" in said) || mode === null) return;
    const from = { ...at };
    for (const axis of ["X", "Y", "Z"]) if (axis in said) at[axis] = said[axis];
    const rise = at.Z - from.Z;
    let flat = Math.hypot(at.X - from.X, at.Y - from.Y), middle = { X: (from.X + at.X) / 2, Y: (from.Y + at.Y) / 2 };
    if (mode >= 2) {
      const centre = { X: from.X + (said.I || 0), Y: from.Y + (said.J || 0) };
      const radius = Math.hypot(said.I || 0, said.J || 0);
      const angle = p => Math.atan2(p.Y - centre.Y, p.X - centre.X);
      let sweep = (angle(at) - angle(from)) * (mode === 3 ? 1 : -1);
      while (sweep <= 0) sweep += 2 * Math.PI;
      flat = radius * sweep;
      const half = angle(from) + sweep / 2 * (mode === 3 ? 1 : -1);
      middle = { X: centre.X + radius * Math.cos(half), Y: centre.Y + radius * Math.sin(half) };
    }
    moves.push({ line: index + 1, text, mode, from, to: { ...at }, flat, length: Math.hypot(flat, rise), middle });
  });
  return moves;
}
