// Draws docs/preview.png, the README's picture of the page: node picture.js
import { dirname, join } from "node:path";
import { fileURLToPath } from "node:url";
import { demo, frames, launch, make, open } from "./making.js";

const browser = await launch();
const clamps = ["--clamp", "-30,45,-10,75,4mm", "--clamp", "290,45,310,75,4mm"];
const made = make("sign", demo("sign.dxf"), "--stock", "340x170mm", "--thickness", "9mm", ...clamps);
const { page } = await open(browser, made.url, { viewport: { width: 1180, height: 760 } });
// The page shows the name as it was typed; a path of one machine says nothing to another.
await page.$eval("h1", h1 => { h1.textContent = h1.textContent.split("/").pop(); });
const box = await page.locator("#plot").boundingBox();
await page.mouse.click(box.x + box.width * 0.4, box.y + box.height / 2);
await page.keyboard.press("0");
await frames(page);
await page.screenshot({ path: join(dirname(fileURLToPath(import.meta.url)), "..", "..", "docs", "preview.png") });
await browser.close();
