"""The benchmarks run; their times are for people, not for tests."""

import subprocess
import sys
from pathlib import Path

import pytest

HERE = Path(__file__).parent


@pytest.mark.parametrize("script", sorted(p.name for p in HERE.glob("*.py") if not p.name.startswith("test_")))
def test_benchmark_runs(script):
    done = subprocess.run(
        [sys.executable, HERE / script, "--quick"], capture_output=True, text=True, timeout=120, check=False
    )
    assert done.returncode == 0, done.stderr
    assert done.stderr == ""
    assert len(done.stdout.splitlines()) > 3
