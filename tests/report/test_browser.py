"""The page in a browser: it loads nothing, runs nothing, and fits its window."""

from __future__ import annotations

import json
import re
import shutil
import subprocess
import threading
from html import unescape
from http.server import BaseHTTPRequestHandler, ThreadingHTTPServer
from tempfile import TemporaryDirectory
from typing import Any

import pytest

import simcore
from simcore.report.page import page

BROWSER = next((found for name in ("chromium", "chromium-browser") if (found := shutil.which(name))), None)
WIDTH = 1280
PROBE = """<script>
window.addEventListener("load", () => {
  const root = document.documentElement;
  const cut = [...document.querySelectorAll("svg text")].filter((node) => {
    const box = node.getBoundingClientRect(), frame = node.ownerSVGElement.getBoundingClientRect();
    return box.width === 0 || box.left < frame.left - 1 || box.right > frame.right + 1 || box.bottom > frame.bottom + 1;
  });
  document.title = JSON.stringify({
    window: window.innerWidth, wide: Math.max(root.scrollWidth, document.body.scrollWidth),
    cut: cut.map((node) => node.textContent),
    pictures: [...document.querySelectorAll("svg")].map((node) => node.getBoundingClientRect().height > 50),
    tables: [...document.querySelectorAll("table")].filter((node) => node.scrollWidth > node.clientWidth + 1).length,
  });
});
</script>"""


def looked_at(text: str) -> dict[str, Any]:
    """What a browser makes of a page, asked by a script that the page itself would not let run; loaded: what the
    browser asks a server on this machine for besides the page."""
    policy = re.compile(r'<meta http-equiv="Content-Security-Policy"[^>]*>\n')
    assert len(policy.findall(text)) == 1
    content = policy.sub("", text).replace("</body>", f"{PROBE}</body>").encode()
    asked: list[str] = []

    class Serving(BaseHTTPRequestHandler):
        def do_GET(self) -> None:
            asked.append(self.path)
            self.send_response(200)
            self.end_headers()
            self.wfile.write(content if self.path == "/page" else b"")

        def log_message(self, format: str, *arguments: object) -> None:
            pass

    with ThreadingHTTPServer(("127.0.0.1", 0), Serving) as server, TemporaryDirectory() as profile:
        thread = threading.Thread(target=server.serve_forever)
        thread.start()
        command = [str(BROWSER), "--headless", "--no-sandbox", "--disable-gpu", "--hide-scrollbars"]
        command += [f"--user-data-dir={profile}", f"--window-size={WIDTH},900", "--virtual-time-budget=2000"]
        command += ["--dump-dom", f"http://127.0.0.1:{server.server_port}/page"]
        try:
            done = subprocess.run(command, capture_output=True, text=True, timeout=120, check=True)
        finally:
            server.shutdown()
            thread.join()
    title = re.search(r"<title>(.*?)</title>", done.stdout)
    assert title is not None and asked[0] == "/page"
    return {**json.loads(unescape(title[1])), "loaded": [path for path in asked[1:] if path != "/favicon.ico"]}


@pytest.mark.skipif(BROWSER is None, reason="no chromium is installed to look at the page with")
def test_the_page_in_a_browser() -> None:
    design = simcore.read(simcore.library_folder() / "mains_input.rect")
    text = page(design.prove(), design.project)
    assert "<script" not in text and not re.search(r"\b(?:src|href)=|url\(|@import", text)
    found = looked_at(text)
    assert found["window"] == WIDTH and found["wide"] == WIDTH, "it scrolls sideways"
    assert found["loaded"] == [] and found["cut"] == [] and found["tables"] == 0
    assert len(found["pictures"]) == 5 and all(found["pictures"])


@pytest.mark.skipif(BROWSER is None, reason="no chromium is installed to look at the page with")
def test_the_browser_sees_what_is_wrong() -> None:
    """A page that loads something, is too wide and has words outside a picture is found out."""
    picture = '<svg width="90" height="90" viewBox="0 0 90 90"><text x="80" y="20">cut off here</text></svg>'
    policy = '<meta http-equiv="Content-Security-Policy" content="default-src \'none\'">\n'
    text = f'<html><head>{policy}<title>x</title><link rel="stylesheet" href="style.css"></head><body>{picture}'
    found = looked_at(f'{text}<div style="width: 2000px">wide</div></body></html>')
    assert found["loaded"] == ["/style.css"] and found["cut"] == ["cut off here"] and found["wide"] >= 2000
