"""For all tests: one thread, and skips that count as failures where the thing must be present.

``FEM_FLOW_REQUIRES="gmsh pyvista pardiso"`` turns every skip whose reason names one of these words into a failure;
``FEM_FLOW_REQUIRE_BROWSER=1`` does so for the tests that need Chromium.
"""

import os

os.environ.setdefault("OMP_NUM_THREADS", "1")  # before numpy or MKL is loaded; two threads are not repeatable to the last bit

import pytest

REQUIRED = os.environ.get("FEM_FLOW_REQUIRES", "").lower().split()
if os.environ.get("FEM_FLOW_REQUIRE_BROWSER", "") not in ("", "0"):
    REQUIRED += ["chromium", "browser", "pdftotext"]


def _refuse_skip(report):
    if not report.skipped or hasattr(report, "wasxfail"):
        return
    reason = str(report.longrepr[-1] if isinstance(report.longrepr, tuple) else report.longrepr)
    missing = [word for word in REQUIRED if word in reason.lower()]
    if missing:
        report.outcome = "failed"
        report.longrepr = f"{', '.join(missing)} must be present here, but: {reason}"


@pytest.hookimpl(wrapper=True)
def pytest_runtest_makereport(item, call):
    report = yield
    _refuse_skip(report)
    return report


@pytest.hookimpl(wrapper=True)
def pytest_make_collect_report(collector):
    report = yield
    _refuse_skip(report)
    return report
