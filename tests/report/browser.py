"""Pages measured in a real browser without a screen: one run for many pages and widths."""

from __future__ import annotations

import json
import os
import re
import subprocess
from html import escape, unescape
from pathlib import Path
from shutil import which

PROGRAM = next(filter(None, map(which, ("chromium", "chromium-browser", "google-chrome"))), None)

_MEASURE = """
const found = {};
let left = document.querySelectorAll('iframe').length;
for (const frame of document.querySelectorAll('iframe')) {
  frame.onload = () => {
    const page = frame.contentDocument, root = page.documentElement;
    const limit = root.clientWidth;
    const wide = [...page.body.querySelectorAll('*')].filter(
      item => !item.closest('svg *') && item.getBoundingClientRect().right > limit + 0.5);
    const flat = [...page.querySelectorAll('math')].filter(item => {
      const box = item.getBoundingClientRect(); return !(box.width > 0 && box.height > 0); });
    found[frame.id] = {
      maths: page.querySelectorAll('math').length, flat: flat.length,
      overflow: root.scrollWidth - limit,
      wide: wide.slice(0, 3).map(item => item.outerHTML.slice(0, 200)),
      requests: frame.contentWindow.performance.getEntriesByType('resource').length };
    if (--left === 0) {
      const told = document.createElement('pre');
      told.id = 'told'; told.textContent = JSON.stringify(found);
      document.body.replaceChildren(told);
    }
  };
  frame.srcdoc = frame.dataset.page;
}
"""


def measured(pages: dict[str, str], widths: tuple[int, ...], folder: Path):
    """Name@width -> what was measured, and the lines of the browser's console."""
    frames = "".join(
        f'<iframe id="{escape(name)}@{wide}" width="{wide}" height="900" style="border:0" '
        f'data-page="{escape(page)}"></iframe>'
        for name, page in pages.items()
        for wide in widths
    )
    host = folder / "measure.html"
    host.write_text(
        f'<!DOCTYPE html><meta charset="utf-8"><body>{frames}<script>{_MEASURE}</script></body>',
        encoding="utf-8",
    )
    command = [
        PROGRAM,
        "--headless",
        "--disable-gpu",
        "--enable-logging=stderr",
        f"--user-data-dir={folder / 'profile'}",
        "--virtual-time-budget=60000",
        "--window-size=1000,1000",
        *(["--no-sandbox"] if os.geteuid() == 0 else []),
        "--dump-dom",
        host.as_uri(),
    ]
    done = subprocess.run(  # noqa: S603 - a fixed command
        command, capture_output=True, text=True, timeout=300, check=True
    )
    told = re.search(r'<pre id="told">(.*?)</pre>', done.stdout, re.DOTALL)
    assert told is not None, done.stderr[-2000:]
    console = [line for line in done.stderr.splitlines() if "CONSOLE" in line]
    return json.loads(unescape(told[1])), console
