// Opens reports in Firefox and tells, as JSON, what it finds there; the Go test
// beside it makes the reports and judges. Run:
//   node check.mjs PACKAGES FIREFOX PROFILE-DIR light|dark WIDTH HEIGHT report.html...
import { createRequire } from "node:module";
import { mkdtempSync, rmSync, writeFileSync } from "node:fs";
import { basename, join } from "node:path";
import { pathToFileURL } from "node:url";

const [packages, firefox, temp, scheme, width, height, ...files] = process.argv.slice(2);
const puppeteer = createRequire(join(packages, "package.json"))("puppeteer-core");
const patience = 180_000; // a guard against hanging, not a measure

// In the page: everything a reader may do, without a mouse.
async function inspect() {
  const still = () => new Promise((r) => requestAnimationFrame(() => requestAnimationFrame(() => setTimeout(r, 50))));
  const saved = async (button) => {
    const kept = [];
    const url = URL.createObjectURL, click = HTMLAnchorElement.prototype.click;
    URL.createObjectURL = (blob) => { kept.push(blob); return url.call(URL, blob); };
    HTMLAnchorElement.prototype.click = function () { kept.push(this.download); };
    button.click();
    for (const t0 = Date.now(); kept.length < 2 && Date.now() - t0 < 60_000;) await new Promise((r) => setTimeout(r, 20));
    URL.createObjectURL = url;
    HTMLAnchorElement.prototype.click = click;
    return { name: kept[1], blob: kept[0] };
  };
  const spans = () => [...document.querySelectorAll(".plot")].map((p) => JSON.parse(p.dataset.span));
  const out = { ready: document.documentElement.dataset.ready, width: document.documentElement.scrollWidth, ground: getComputedStyle(document.documentElement).backgroundColor, figures: [] };
  for (const f of document.querySelectorAll(".figure")) {
    const figure = { id: f.id, title: f.querySelector("h3").textContent, drawing: !!f.querySelector("svg.chart"), csv: "", svg: "", colours: 0 };
    figure.paths = [...f.querySelectorAll(".plot path, svg.chart path")].filter((p) => p.getTotalLength() > 20).length;
    const button = (kind) => f.querySelector("[data-save=" + kind + "]");
    if (button("csv")) figure.csv = await (await saved(button("csv"))).blob.text();
    figure.svg = await (await saved(button("svg"))).blob.text();
    const png = await createImageBitmap((await saved(button("png"))).blob);
    figure.png = [png.width, png.height];
    const canvas = document.createElement("canvas");
    canvas.width = png.width / 3;
    canvas.height = png.height / 3;
    const pen = canvas.getContext("2d");
    pen.drawImage(png, 0, 0, canvas.width, canvas.height);
    const dots = new Uint32Array(pen.getImageData(0, 0, canvas.width, canvas.height).data.buffer);
    figure.colours = new Set(dots).size;
    out.figures.push(figure);
  }
  if (spans().length) {
    const whole = spans()[0], from = document.getElementById("from"), to = document.getElementById("to");
    out.whole = spans();
    from.value = whole[0] + (whole[1] - whole[0]) / 4;
    to.value = whole[0] + (whole[1] - whole[0]) / 2;
    to.dispatchEvent(new Event("change"));
    await still();
    out.zoomed = spans();
    document.getElementById("whole").click();
    await still();
    out.again = spans();
    out.cursor = document.getElementById("now").value;
    out.values = [...document.querySelectorAll("[data-value]")].filter((e) => e.textContent !== "").length;
    const stage = document.querySelector(".stage");
    stage.focus();
    out.focus = getComputedStyle(stage).outlineStyle;
    out.scales = 0;
    for (const box of document.querySelectorAll("[data-scale]")) {
      const look = () => [...box.closest(".figure").querySelectorAll(".plot path")].map((p) => p.getAttribute("d")).join();
      const before = look();
      box.click();
      await still();
      if (look() !== before && !look().includes("NaN")) out.scales++;
      box.click();
      await still();
    }
    out.boxes = document.querySelectorAll("[data-scale]").length;
  }
  return out;
}

const profile = mkdtempSync(join(temp, "profile-"));
const browser = await puppeteer.launch({
  browser: "firefox", executablePath: firefox, headless: true, userDataDir: profile, timeout: patience, protocolTimeout: patience,
  env: { ...process.env, HOME: profile, MOZ_HEADLESS: "1" },
  extraPrefsFirefox: { "layout.css.prefers-color-scheme.content-override": scheme === "dark" ? 0 : 1, "datareporting.policy.dataSubmissionEnabled": false, "app.update.enabled": false, "network.dns.disabled": true },
});
try {
  const found = {};
  for (const file of files) {
    const page = await browser.newPage();
    page.setDefaultTimeout(patience);
    await page.setViewport({ width: Number(width), height: Number(height) });
    const said = [], requests = [];
    page.on("console", (m) => said.push(m.type() + ": " + m.text()));
    page.on("pageerror", (e) => said.push("error: " + e.message));
    page.on("request", (r) => requests.push(r.url().slice(0, 200)));
    await page.goto(pathToFileURL(file).href, { waitUntil: "load" });
    await page.waitForSelector("html[data-ready]");
    const seen = await page.evaluate(inspect);
    const asked = [...requests]; // what Firefox itself fetches for printing comes later
    const pdf = await page.pdf({ format: "A4" });
    const shot = await page.screenshot({ fullPage: true });
    if (process.env.CYCLE_SHOTS) writeFileSync(join(process.env.CYCLE_SHOTS, "firefox-" + basename(file, ".html") + "-" + width + "-" + scheme + ".png"), shot);
    found[basename(file)] = { ...seen, said, asked, pdf: pdf.length, engine: await browser.version() };
    await page.close();
  }
  process.stdout.write(JSON.stringify(found));
} finally {
  await browser.close();
  rmSync(profile, { recursive: true, force: true, maxRetries: 5 });
}
