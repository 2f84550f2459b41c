"""Design sheets in a real browser: the console stays silent, nothing is fetched, nothing spills or
overlaps on A4, Letter and a telephone, and everyone can read them.

    python3 tests/outside/sheets.py PROGRAM BROWSER

Talks to a Chromium by its own debugging pipe; needs nothing but Python. Where `pdftotext` is there, the
numbers of the page are looked for in the PDF as well.
"""

import json
import os
import shutil
import subprocess
import sys
import tempfile

# CSS pixels: a desk, A4 and Letter as the browser counts paper (96 per inch), a telephone.
WIDTHS = {"desk": 1200, "A4": 794, "Letter": 816, "telephone": 390}
# Least contrast of text with its ground (WCAG 2.1, success criterion 1.4.3; 3 for large text).
CONTRAST = 4.5

LOOK = r"""
(() => {
  const faults = [];
  const fault = (what, node) => faults.push(what + ": " + (node ? node.outerHTML.slice(0, 120) : ""));
  const wide = document.documentElement.scrollWidth;
  if (wide > window.innerWidth) fault("the page is " + wide + " px wide in " + window.innerWidth);

  // Headings rise one by one.
  let last = 0;
  for (const head of document.querySelectorAll("h1, h2, h3, h4, h5, h6")) {
    const level = Number(head.tagName[1]);
    if (level > last + 1) fault("a heading skips a level", head);
    last = level;
  }
  if (document.querySelectorAll("h1").length !== 1) fault("not one h1");
  for (const head of document.querySelectorAll("th"))
    if (!head.getAttribute("scope")) fault("no scope", head);
  for (const table of document.querySelectorAll("table"))
    if (!table.querySelector("caption")) fault("no caption", table);
  for (const svg of document.querySelectorAll("svg"))
    if (svg.getAttribute("role") !== "img" || !svg.querySelector(":scope > title")?.textContent.trim()
        || !svg.querySelector(":scope > desc")?.textContent.trim()) fault("a figure without words", svg);
  const ids = [...document.querySelectorAll("[id]")].map(it => it.id);
  if (new Set(ids).size !== ids.length) fault("an id stands twice");
  for (const it of document.querySelectorAll("[aria-labelledby]"))
    if (!document.getElementById(it.getAttribute("aria-labelledby"))) fault("a label is missing", it);

  // Contrast of every text with the ground it stands on.
  const rgba = text => text.match(/[\d.]+/g).map(Number);
  const linear = c => (c /= 255) <= 0.04045 ? c / 12.92 : ((c + 0.055) / 1.055) ** 2.4;
  const luminance = ([r, g, b]) => 0.2126 * linear(r) + 0.7152 * linear(g) + 0.0722 * linear(b);
  const ground = node => {
    for (let it = node; it; it = it.parentElement) {
      const colour = rgba(getComputedStyle(it).backgroundColor);
      if (colour.length < 4 || colour[3] > 0) return colour;
    }
    return [255, 255, 255];
  };
  const texts = [];
  const walker = document.createTreeWalker(document.body, NodeFilter.SHOW_TEXT);
  while (walker.nextNode()) {
    const node = walker.currentNode;
    if (!node.data.trim() || node.parentElement.closest("svg, style")) continue;
    const range = document.createRange();
    range.selectNodeContents(node);
    const boxes = [...range.getClientRects()].filter(it => it.width > 1 && it.height > 1);
    if (!boxes.length) continue;
    const parent = node.parentElement;
    const style = getComputedStyle(parent);
    const [a, b] = [luminance(rgba(style.color)), luminance(ground(parent))];
    const contrast = (Math.max(a, b) + 0.05) / (Math.min(a, b) + 0.05);
    if (contrast < CONTRAST) fault("contrast " + contrast.toFixed(2), parent);
    for (const box of boxes) texts.push([box, node]);
  }

  // No two texts on each other; none outside of its cell or of the page. Heads that only screen
  // readers see are clipped to nothing.
  const seen = texts.filter(([box, node]) => !(node.parentElement.closest("thead")
    && getComputedStyle(node.parentElement.closest("thead")).position === "absolute"));
  seen.sort((a, b) => a[0].top - b[0].top);
  for (let i = 0; i < seen.length && faults.length < 20; i++) {
    const [one, node] = seen[i];
    if (one.left < -1 || one.right > window.innerWidth + 1) fault("outside of the page", node.parentElement);
    const cell = node.parentElement.closest("td, th, dd, dt, li");
    if (cell) {
      const frame = cell.getBoundingClientRect();
      if (one.right > frame.right + 2 || one.left < frame.left - 2 || one.bottom > frame.bottom + 4)
        fault("outside of its cell", node.parentElement);
    }
    for (let j = i + 1; j < seen.length && seen[j][0].top < one.bottom - 2; j++) {
      const [other, more] = seen[j];
      const width = Math.min(one.right, other.right) - Math.max(one.left, other.left);
      const height = Math.min(one.bottom, other.bottom) - Math.max(one.top, other.top);
      if (width > 2 && height > 4) {
        fault("on each other: “" + node.data.slice(0, 30) + "” and “" + more.data.slice(0, 30) + "”");
        break;
      }
    }
  }
  return { faults, texts: texts.length };
})()
"""


class Browser:
    """A browser at the other end of two pipes."""

    def __init__(self, program, folder):
        to_browser, ours = os.pipe()
        theirs, from_browser = os.pipe()
        os.set_inheritable(to_browser, True)
        os.set_inheritable(from_browser, True)

        def place():
            # Both must leave 3 and 4 before they can be put there.
            reading, writing = os.dup(to_browser), os.dup(from_browser)
            high = max(reading, writing, 10) + 1
            os.dup2(reading, high)
            os.dup2(writing, high + 1)
            os.dup2(high, 3)
            os.dup2(high + 1, 4)

        self.process = subprocess.Popen(
            [program, "--headless=new", "--no-sandbox", "--disable-gpu", "--no-first-run",
             f"--user-data-dir={folder}", "--remote-debugging-pipe", "about:blank"],
            close_fds=False, preexec_fn=place, stdout=subprocess.DEVNULL, stderr=subprocess.DEVNULL)
        os.close(to_browser)
        os.close(from_browser)
        self.out, self.into = os.fdopen(ours, "wb"), os.fdopen(theirs, "rb")
        self.count, self.events = 0, []
        target = self.ask("Target.createTarget", url="about:blank")["targetId"]
        self.session = None
        self.session = self.ask("Target.attachToTarget", targetId=target, flatten=True)["sessionId"]
        for domain in ["Page", "Runtime", "Log", "Network"]:
            self.ask(f"{domain}.enable")

    def read(self):
        message = bytearray()
        while (byte := self.into.read(1)) != b"\0":
            if not byte:
                raise SystemExit("the browser has gone away")
            message += byte
        return json.loads(message)

    def ask(self, method, **parameters):
        self.count += 1
        message = {"id": self.count, "method": method, "params": parameters}
        if getattr(self, "session", None):
            message["sessionId"] = self.session
        self.out.write(json.dumps(message).encode() + b"\0")
        self.out.flush()
        while True:
            answer = self.read()
            if answer.get("id") == self.count:
                if "error" in answer:
                    raise SystemExit(f"{method}: {answer['error']}")
                return answer["result"]
            self.events.append(answer)

    def open(self, url, width):
        self.events.clear()
        self.ask("Emulation.setDeviceMetricsOverride", width=width, height=1100, deviceScaleFactor=1,
                 mobile=width < 500)
        self.ask("Page.navigate", url=url)
        while not any(it.get("method") == "Page.loadEventFired" for it in self.events):
            self.events.append(self.read())

    def evaluate(self, script):
        result = self.ask("Runtime.evaluate", expression=script, returnByValue=True)
        if "exceptionDetails" in result:
            raise SystemExit(json.dumps(result["exceptionDetails"], indent=1))
        return result["result"]["value"]

    def complaints(self, url):
        """What the console says, and what is fetched beside the page."""
        found = []
        for event in self.events:
            method, values = event.get("method"), event.get("params", {})
            if method in ("Runtime.consoleAPICalled", "Runtime.exceptionThrown", "Log.entryAdded"):
                found.append(f"console: {json.dumps(values)[:200]}")
            if method == "Network.requestWillBeSent" and values["request"]["url"] != url:
                found.append(f"fetched: {values['request']['url'][:200]}")
        return found

    def close(self):
        self.out.close()
        self.into.close()
        try:
            self.process.wait(10)
        except subprocess.TimeoutExpired:
            self.process.kill()
            self.process.wait()


def look(browser, page):
    url = "file://" + page
    faults = []
    for paper, width in WIDTHS.items():
        browser.open(url, width)
        for medium in ["screen", "print"] if paper in ("A4", "Letter") else ["screen"]:
            browser.ask("Emulation.setEmulatedMedia", media=medium)
            seen = browser.evaluate(LOOK.replace("CONTRAST", str(CONTRAST)))
            faults += [f"{paper}, {medium}: {fault}" for fault in seen["faults"]]
            if seen["texts"] < 100:
                faults.append(f"{paper}, {medium}: only {seen['texts']} texts")
        browser.ask("Emulation.setEmulatedMedia", media="")
        faults += [f"{paper}: {complaint}" for complaint in browser.complaints(url)]
    return faults


def numbers_of_the_pdf(page, pdf):
    """Numbers that the page marks as such, and the PDF does not hold."""
    text = subprocess.run(["pdftotext", "-layout", pdf, "-"], capture_output=True, check=True, text=True).stdout
    html = open(page, encoding="utf-8").read()
    shown = {piece.split(">", 1)[1].split("</data>", 1)[0] for piece in html.split("<data ")[1:]}
    return sorted(number for number in shown if number not in text)


def main(program, browser_program):
    faults = 0
    with tempfile.TemporaryDirectory() as folder:
        many = os.path.join(folder, "many.toml")
        with open("structures/estuary-980.toml", encoding="utf-8") as file:
            text = file.read()
        group = '[[layers]]\nrepeat = 495\nlayers = [\n' \
            '  { role = "cladding", material = "GaAs", thickness_nm = 3, donors_cm3 = 1e18, dopant = "Si" },\n' \
            '  { role = "cladding", material = "AlAs", thickness_nm = 2 },\n]\n\n'
        long = "W" * 3000
        text = text.replace("[[layers]]", group + "[[layers]]", 1).replace(
            'author = "Estuary pump desk"', f'author = "{long[:200]}"\ncontact = "{long}"')
        with open(many, "w", encoding="utf-8") as file:
            file.write(text)
        browser = Browser(browser_program, os.path.join(folder, "profile"))
        for structure, reader in [("structures/estuary-1310.toml", "grower"),
                                  ("structures/estuary-1310.toml", "house"),
                                  ("structures/every-key.toml", "house"), (many, "grower")]:
            out = os.path.join(folder, f"{os.path.basename(structure)}-{reader}")
            subprocess.run([program, "sheet", structure, "--for", reader, "--out", out, "--pdf", "--quiet"],
                           check=True, stdout=subprocess.DEVNULL)
            page = os.path.join(out, "sheet.html")
            found = look(browser, page)
            if shutil.which("pdftotext"):
                missing = numbers_of_the_pdf(page, os.path.join(out, "sheet.pdf"))
                found += [f"PDF: {number} is missing" for number in missing]
            print(f"{os.path.basename(structure)} for {reader}: {len(found)} faults at {', '.join(WIDTHS)}")
            for fault in found[:20]:
                print("   ", fault)
            faults += len(found)
        browser.close()
    if not shutil.which("pdftotext"):
        print("left out: no pdftotext to read the PDF with")
    sys.exit(1 if faults else 0)


if __name__ == "__main__":
    main(os.path.abspath(sys.argv[1]), sys.argv[2])
