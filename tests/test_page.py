"""The report page in a real browser: offline, silent, playable, accessible, printable."""

from __future__ import annotations

import base64
import re
import shutil
from pathlib import Path

import pytest

playwright = pytest.importorskip("playwright.sync_api", reason="playwright is not installed")
axe_module = pytest.importorskip(
    "axe_playwright_python.sync_playwright", reason="axe-playwright-python is not installed"
)

from chainsim.findings import judge  # noqa: E402
from chainsim.report import compare, render_comparison, render_report  # noqa: E402
from tests.synthetic import synthetic_recording  # noqa: E402

BROWSERS = ("chromium", "chromium-browser", "google-chrome", "chrome")
SWITCHES = ["--no-sandbox", "--disable-gpu", "--disable-dev-shm-usage"]
SIZES = {"laptop": (1366, 850), "phone": (390, 844)}
LOST_BALL = 3


@pytest.fixture(scope="module")
def browser():
    program = next((p for p in map(shutil.which, BROWSERS) if p), None)
    if program is None:
        pytest.skip(f"no browser is installed: none of {', '.join(BROWSERS)} is on the path")
    with playwright.sync_playwright() as driver:
        running = driver.chromium.launch(executable_path=program, args=SWITCHES)
        yield running
        running.close()


@pytest.fixture(scope="module")
def recording():
    return synthetic_recording(duration=6.0, links=60, spilled_ball=LOST_BALL)


@pytest.fixture(scope="module")
def report(tmp_path_factory, recording):
    return render_report(recording, tmp_path_factory.mktemp("page") / "report.html")


class Visit:
    """A page opened without a network, with everything it said and asked for."""

    def __init__(self, browser, path: Path, size: str = "laptop") -> None:
        width, height = SIZES[size]
        viewport = {"width": width, "height": height}
        self.context = browser.new_context(viewport=viewport, offline=True)
        self.page = self.context.new_page()
        self.said: list[str] = []
        self.asked: list[str] = []
        self.page.on("console", lambda message: self.said.append(message.text))
        self.page.on("pageerror", lambda error: self.said.append(str(error)))
        self.page.on("request", lambda request: self.asked.append(request.url))
        self.page.goto(path.as_uri())

    def __enter__(self):
        return self

    def __exit__(self, *_):
        self.context.close()

    def ready(self) -> Visit:
        self.page.wait_for_selector("#player[data-ready=yes]", timeout=20_000)
        return self

    def time(self) -> float:
        return float(self.page.locator("#player").get_attribute("data-time"))

    def beyond(self) -> int:
        return self.page.evaluate("document.documentElement.scrollWidth - window.innerWidth")


def picture(visit: Visit) -> str:
    return visit.page.locator("#canvas-whole").evaluate("canvas => canvas.toDataURL()")


def test_opens_from_disk_without_a_request_or_a_word(browser, report):
    with Visit(browser, report) as visit:
        visit.ready()
        assert visit.said == []
        assert visit.asked == [report.as_uri()]


def test_plays_pauses_and_steps(browser, report):
    with Visit(browser, report) as visit:
        page = visit.ready().page
        before = picture(visit)
        page.click("#play")
        page.wait_for_timeout(400)
        page.click("#play")
        assert visit.time() > 0.05
        assert picture(visit) != before
        assert page.locator("#play").text_content() == "Play"
        paused = visit.time()
        page.click("#step-on")
        step = visit.time() - paused
        assert 0.0 < step <= 0.0201  # 50 recorded moments a second
        page.click("#step-back")
        page.click("#step-back")
        assert visit.time() < paused + step


def test_a_mark_is_reached_to_the_sample(browser, report, recording):
    findings = [f for f in judge(recording) if f.time is not None and f.time > 0.0]
    with Visit(browser, report) as visit:
        page = visit.ready().page
        for finding in findings:
            name = re.compile(f"^{re.escape(f'{finding.time:.3f} s: {finding.title}')}")
            page.get_by_role("button", name=name).click()
            assert visit.time() == pytest.approx(finding.time, abs=2e-3)  # half a sample
        assert page.locator("#player-status").text_content().startswith("At ")


def test_the_lost_ball_is_ringed_when_it_leaves_its_pocket(browser, report, recording):
    lost = recording.balls[LOST_BALL]
    with Visit(browser, report) as visit:
        page = visit.ready().page
        page.get_by_role("button", name=f"ball {LOST_BALL} spilled").click()
        assert visit.time() == pytest.approx(lost.end_time, abs=5e-3)  # the sample before
        assert page.locator("#closeup").input_value() == "mark"
        detail = page.locator("#canvas-detail").screenshot()
        assert len(detail) > 2000


def test_keyboard_alone_drives_the_playback(browser, report):
    with Visit(browser, report) as visit:
        page = visit.ready().page
        page.focus("#player")
        page.keyboard.press("ArrowRight")
        assert visit.time() == pytest.approx(0.02, abs=1e-6)
        page.keyboard.press("End")
        assert visit.time() == pytest.approx(6.0, abs=1e-6)
        page.keyboard.press("b")
        assert visit.time() < 6.0
        page.keyboard.press("Home")
        page.keyboard.press("-")
        assert page.locator("#speed").input_value() == "0.5"
        page.keyboard.press("Space")
        page.wait_for_timeout(300)
        page.keyboard.press("Space")
        assert 0.0 < visit.time() < 1.0


def test_offers_speeds_from_a_fiftieth_to_four_times(browser, report):
    with Visit(browser, report) as visit:
        values = (
            visit.ready().page.locator("#speed option").evaluate_all("o => o.map(x => x.value)")
        )
        assert min(map(float, values)) == pytest.approx(1 / 50)
        assert max(map(float, values)) == 4.0


@pytest.mark.parametrize("size", SIZES)
def test_no_accessibility_violation_and_no_sideways_scrolling(browser, report, size):
    with Visit(browser, report, size) as visit:
        page = visit.ready().page
        page.locator("details").evaluate_all("all => all.forEach(one => { one.open = true; })")
        results = axe_module.Axe().run(page)
        assert results.violations_count == 0, results.generate_report()
        assert visit.beyond() <= 0


def test_every_control_has_a_name(browser, report):
    with Visit(browser, report) as visit:
        page = visit.ready().page
        for role in ("button", "slider", "combobox"):
            for control in page.get_by_role(role).all():
                label = control.evaluate(
                    "e => e.getAttribute('aria-label') || e.textContent.trim() ||"
                    " (e.labels && e.labels[0] && e.labels[0].textContent.trim())"
                )
                assert label, control.evaluate("e => e.outerHTML")


def test_says_so_where_the_browser_cannot_unpack(browser, report):
    with Visit(browser, report) as visit:
        visit.page.add_init_script("delete window.DecompressionStream")
        visit.page.reload()
        text = visit.page.locator("#player-status").text_content()
        assert "DecompressionStream" in text
        assert visit.page.locator("#play").is_disabled()
        assert visit.said == []


def test_prints_to_pdf_with_every_part(browser, report):
    with Visit(browser, report) as visit:
        visit.ready()
        pdf = visit.page.pdf(prefer_css_page_size=True)
        assert pdf.startswith(b"%PDF")
        assert len(re.findall(rb"/Type\s*/Page\b", pdf)) >= 5
        visit.page.emulate_media(media="print")
        assert visit.page.locator("#player").is_hidden()
        assert visit.page.locator("#cautions").is_visible()


@pytest.mark.parametrize("size", SIZES)
def test_comparison_page(browser, tmp_path, recording, size):
    other = synthetic_recording(duration=6.0, links=60, chain_speed=0.2)
    path = render_comparison(compare([recording, other]), tmp_path / "compare.html")
    with Visit(browser, path, size) as visit:
        assert visit.said == []
        assert visit.asked == [path.as_uri()]
        results = axe_module.Axe().run(visit.page)
        assert results.violations_count == 0, results.generate_report()
        assert visit.beyond() <= 0
        assert "drive.chain_speed" in visit.page.locator("#inputs").text_content()


def test_plots_are_drawn_in_the_page(browser, report):
    with Visit(browser, report) as visit:
        widths = (
            visit.ready()
            .page.locator(".plot img")
            .evaluate_all("images => images.map(image => image.naturalWidth)")
        )
        assert len(widths) >= 8
        assert all(width > 100 for width in widths)


def test_no_script_but_its_own_may_run(browser, tmp_path, recording, report):
    text = report.read_text(encoding="utf-8")
    policy = re.search(r'Content-Security-Policy" content="([^"]+)"', text)[1]
    assert policy.startswith("default-src 'none';")
    assert "unsafe" not in policy
    for name in ("style", "script"):
        digest = re.search(rf"{name}-src 'sha256-([^']+)'", policy)[1]
        assert len(base64.b64decode(digest)) == 32
    path = tmp_path / "foreign.html"
    path.write_text(
        text.replace("<main", "<script>document.title = 'taken'</script><main"), "utf-8"
    )
    with Visit(browser, path) as visit:
        assert visit.page.title() != "taken"
