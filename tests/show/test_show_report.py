"""The report: answer first, escaped, offline, nothing overflows in a real browser, printable."""

import html
import os
import re
import shutil
import subprocess
from html.parser import HTMLParser

import pytest
import synthetic_flows as synthetic

from fem_flow.show.plots import wall_plots
from fem_flow.show.report import report_html

CHROMIUM = next((p for p in ("chromium", "chromium-browser", "google-chrome") if shutil.which(p)), None)
FLAGS = [
    "--hide-scrollbars",
    "--headless",
    "--no-sandbox",
    "--disable-gpu",
    "--disable-quic",
    "--no-first-run",
    "--disable-background-networking",
    "--disable-component-update",
    "--disable-sync",
    "--disable-dev-shm-usage",
]


@pytest.fixture(scope="module")
def page(tmp_path_factory):
    _, outline, walls = synthetic.needle()
    return report_html(synthetic.result(), wall_plots(walls, tmp_path_factory.mktemp("plots")), outline)


def words(text):
    """The page as a reader sees it: tags gone, spaces joined."""
    text = re.sub(r"<style>.*?</style>", "", text, flags=re.S)
    return re.sub(r"\s+", " ", html.unescape(re.sub(r"<[^>]+>", " ", text)))


class Tags(HTMLParser):
    def __init__(self, text):
        super().__init__()
        self.seen = []
        self.feed(text)

    def handle_starttag(self, tag, attrs):
        self.seen.append((tag, dict(attrs)))


def test_the_answer_comes_first(page):
    text = words(page)
    order = [
        "Poppet check valve",
        "Total pressure drop",
        "21.830 kPa",
        "± 0.095 kPa · 21830 Pa",
        "Steady laminar single-phase",
        "Checks that do not hold",
        "Along the walls",
        "All numbers",
        "All checks",
        "The part",
        "Inputs, as run",
        "Mesh and solver",
        "What to keep in mind",
    ]
    places = [text.index(w) for w in order]
    assert places == sorted(places)
    assert page.count('class="card"') == 8


def test_withheld_numbers_show_why(page):
    assert "withheld a sharp re-entrant corner at x = 12.4 mm, y = 6 mm lies on this wall: give it an edge radius" in words(
        page
    )


def test_every_table_has_headers_and_every_picture_words(page):
    seen = Tags(page).seen
    assert seen[0] == ("html", {"lang": "en"})
    pictures = [a for t, a in seen if t == "img"]
    assert [len(a["alt"]) > 40 for a in pictures] == [True, True]
    assert all(a["scope"] in ("col", "row", "rowgroup") for t, a in seen if t == "th")
    assert sum(t == "h1" for t, _ in seen) == 1


def test_verdicts_are_words_beside_shapes_not_colour_alone(page):
    marks = re.findall(r'<span class="mark (\w+)">(<svg.*?</svg>)(\w+)</span>', page, flags=re.S)
    assert {m[0] for m in marks} == {"holds", "caution"}
    assert all(m[0] == m[2] for m in marks)
    assert len({m[1] for m in marks}) == 2


def test_a_check_that_breaks_is_a_banner_above_the_numbers(result):
    result["checks"].append(synthetic.BREAKS)
    result["statements"].append("NOT FOR USE as a design value: Re = 5300 on the bore, above 2300: turbulent.")
    page = report_html(result, [])
    text = words(page)
    banner = "NOT FOR USE as a design value: Laminar (inlet): Re = 5300 on the bore, above 2300: turbulent"
    assert text.index(banner) < text.index("21.830 kPa")
    assert text.count("NOT FOR USE") == 1


def test_all_holds_is_said_in_one_line(result):
    result["checks"] = [c for c in result["checks"] if c["verdict"] == "holds"]
    text = words(report_html(result, []))
    assert "All 2 checks hold; they are listed below." in text
    assert "Checks that do not hold" not in text


def test_every_text_of_the_user_is_escaped():
    evil = "<script>alert(1)</script><img src=x onerror=y>\"'"
    result = synthetic.result(title=evil, statements=[evil])
    result["case"]["fluid"]["name"] = evil
    result["case"]["ports"][evil] = {evil: evil}
    for number in result["numbers"]:
        number.update(note=evil, definition=evil, of=[evil])
    for check in result["checks"]:
        check.update(says=evil, source=evil, of=[evil], verdict="breaks")
    seen = Tags(report_html(result, [])).seen
    assert not [t for t, a in seen if t in ("script", "img") or any(k.startswith("on") for k in a)]
    assert evil in words(report_html(result, []).replace("<script", "&lt;script")) or "alert(1)" in words(
        report_html(result, [])
    )


def test_nothing_outside_is_referred_to(page):
    assert "default-src 'none'; img-src data:; style-src 'unsafe-inline'" in page
    for tag, attributes in Tags(page).seen:
        assert tag not in ("script", "link", "iframe", "object", "base")
        assert not {"href", "srcset", "action"} & set(attributes)
        assert attributes.get("src", "data:").startswith("data:image/png;base64,") or tag != "img"
    assert not re.search(r"url\(|@import|https?:", page)


def browser(tmp_path, *arguments):
    if CHROMIUM is None:
        if os.environ.get("FEM_FLOW_REQUIRE_BROWSER"):
            pytest.fail("FEM_FLOW_REQUIRE_BROWSER is set and no Chromium was found")
        pytest.skip("no Chromium on this machine")
    done = subprocess.run(
        [CHROMIUM, *FLAGS, f"--user-data-dir={tmp_path / 'profile'}", *arguments], capture_output=True, text=True, timeout=120
    )
    return done.stdout


HARNESS = """<!doctype html><meta charset="utf-8"><body>{frames}<pre id="out"></pre><script>
addEventListener("load", () => {{
  const rows = [...document.querySelectorAll("iframe")].map(f => {{
    const d = f.contentDocument, w = d.documentElement.clientWidth;
    const right = e => e.closest("thead, svg") ? 0 : e.getBoundingClientRect().right;
    const wide = [...d.querySelectorAll("body *")].filter(e => right(e) > w + 0.5);
    const asked = f.contentWindow.performance.getEntriesByType("resource").filter(e => !e.name.startsWith("data:"));
    const seen = [...d.images].every(i => i.complete && i.naturalWidth > 0);
    return [w, d.documentElement.scrollWidth, wide.length, asked.length, seen, d.documentElement.scrollHeight > 1000].join(" ");
  }});
  document.getElementById("out").textContent = rows.join("|");
}});
</script></body>"""


def measured(tmp_path, page, widths):
    frames = "".join(
        f'<iframe style="width:{w}px;height:800px;border:0" srcdoc="{html.escape(page, quote=True)}"></iframe>' for w in widths
    )
    (tmp_path / "harness.html").write_text(HARNESS.format(frames=frames), encoding="utf-8")
    dom = browser(tmp_path, "--window-size=1400,900", "--dump-dom", f"file://{tmp_path / 'harness.html'}")
    return [row.split() for row in re.search(r'<pre id="out">(.*?)</pre>', dom, flags=re.S)[1].split("|")]


def test_nothing_overflows_and_nothing_is_fetched_in_a_browser(page, tmp_path):
    for row, width in zip(measured(tmp_path, page, (1280, 390)), ("1280", "390"), strict=True):
        assert row == [width, width, "0", "0", "true", "true"]


def test_long_words_do_not_overflow_either(tmp_path):
    long = "averylongnamewithoutanyspace" * 6
    result = synthetic.result(title=long, statements=[long])
    result["case"]["ports"][long] = {"flow_in": long}
    for number in result["numbers"]:
        number.update(note=long, definition=long, of=[long])
    for check in result["checks"]:
        check.update(says=long, source=long, of=[long], verdict="caution")
    for row, width in zip(measured(tmp_path, report_html(result, []), (1280, 390)), ("1280", "390"), strict=True):
        assert row[:3] == [width, width, "0"]


def test_the_harness_sees_an_overflow(tmp_path):
    bad = "<html><body><div style='width:900px;height:2000px'>x</div></body></html>"
    row = measured(tmp_path, bad, (390,))[0]
    assert row[:3] == ["390", "908", "1"]


def test_it_prints_to_pdf_with_the_scope_on_every_page(page, tmp_path):
    (tmp_path / "report.html").write_text(page, encoding="utf-8")
    browser(tmp_path, "--no-pdf-header-footer", f"--print-to-pdf={tmp_path / 'out.pdf'}", f"file://{tmp_path / 'report.html'}")
    assert (tmp_path / "out.pdf").read_bytes().startswith(b"%PDF")
    if shutil.which("pdftotext") is None:
        pytest.skip("no pdftotext on this machine")
    pages = subprocess.run(
        ["pdftotext", "-layout", str(tmp_path / "out.pdf"), "-"], capture_output=True, text=True
    ).stdout.split("\f")[:-1]
    assert len(pages) >= 3
    assert all("Not a strength, fatigue" in re.sub(r"\s+", " ", p) for p in pages)
