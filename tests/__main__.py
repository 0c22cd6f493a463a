"""Check everything: ``python3 -m tests``; with arguments, only pytest with those arguments.

Prepares the environment with the test tools first, then runs style, types, layers and all tests.
"""

import subprocess
import sys
import tempfile
import time
from collections.abc import Sequence
from dataclasses import dataclass
from pathlib import Path
from xml.etree import ElementTree

from explorer.environment import enter, say

ROOT = Path(__file__).resolve().parent.parent

LAYERS = "import sys; from importlinter.cli import lint_imports; sys.exit(lint_imports())"
PYTEST = ("-m", "pytest", "-q")
CHECKS = (
    ("format", ("-m", "ruff", "format", "--check", ".")),
    ("style", ("-m", "ruff", "check", ".")),
    ("types", ("-m", "mypy")),
    ("layers", ("-c", LAYERS)),
)
TESTS = (
    ("tests", (*PYTEST, "-n", "2", "--dist", "worksteal", "-m", "not browser")),
    ("browser", (*PYTEST, "-m", "browser")),
)
NOTHING_COLLECTED = 5


@dataclass(frozen=True)
class Outcome:
    """One step: exit code, duration [s], tests by how they ended."""

    name: str
    code: int
    seconds: float
    passed: int = 0
    failed: int = 0
    skipped: int = 0


def main(argv: Sequence[str]) -> int:
    """Run the checks and tests; returns 0 only if all is well."""
    enter("test", "tests", argv)
    if argv:
        return _run(("-m", "pytest", *argv))
    outcomes = []
    with tempfile.TemporaryDirectory() as folder:
        for name, command in (*CHECKS, *TESTS):
            _heading(name)
            report = Path(folder) / f"{name}.xml"
            began = time.monotonic()
            if command[: len(PYTEST)] == PYTEST:
                command = (*command, f"--junitxml={report}")
            code = _run(command)
            outcomes.append(Outcome(name, code, time.monotonic() - began, *_counted(report)))
    return _summed_up(outcomes)


def _run(command: Sequence[str]) -> int:
    try:
        return subprocess.run([sys.executable, *command], cwd=ROOT, check=False).returncode
    except KeyboardInterrupt:
        say("Stopped.")
        sys.exit(130)


def _heading(name: str) -> None:
    print(f"\n=== {name} " + "=" * (74 - len(name)), flush=True)


def _counted(report: Path) -> tuple[int, int, int]:
    """Passed, failed and skipped tests of a JUnit report; zeros where there is none."""
    if not report.exists():
        return 0, 0, 0
    passed = failed = skipped = 0
    for suite in ElementTree.parse(report).getroot().iter("testsuite"):
        bad = int(suite.get("failures", 0)) + int(suite.get("errors", 0))
        left_out = int(suite.get("skipped", 0))
        passed += max(int(suite.get("tests", 0)) - bad - left_out, 0)
        failed += bad
        skipped += left_out
    return passed, failed, skipped


def _summed_up(outcomes: Sequence[Outcome]) -> int:
    """Say how every step ended; the exit code of the whole."""
    _heading("summary")
    wrong = [step.name for step in outcomes if step.code]
    for step in outcomes:
        print(f"{step.name:<10} {'FAILED' if step.code else 'ok':<8} {step.seconds:6.0f} s")
    counts = [sum(getattr(s, kind) for s in outcomes) for kind in ("passed", "failed", "skipped")]
    print("{} passed, {} failed, {} skipped".format(*counts), flush=True)
    if wrong:
        say(f"Not well: {', '.join(wrong)}.")
    return 1 if wrong else 0


if __name__ == "__main__":
    sys.exit(main(sys.argv[1:]))
