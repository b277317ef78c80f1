# tests/adapters/notebook/support.py -- where the engines are, and other pythons to import the package in.
import os
import subprocess
import sys
from pathlib import Path

HERE = Path(__file__).resolve().parent
ROOT = HERE.parents[2]
PACKAGE = ROOT / "adapters" / "notebook"
FAKE = str(HERE / "fake_engine.py")
ENGINE = os.environ.get("COUNTSEL_ENGINE") or str(ROOT / "build/release/countsel")

sys.path.insert(0, str(PACKAGE))
os.environ["COUNTSEL_ENGINE"] = ENGINE


def python(code, cwd=None, **environment):
    """Runs code in a Python of its own; a variable given as None is unset. Returns the finished process."""
    env = {**os.environ, "PYTHONPATH": f"{PACKAGE}:{HERE}", "PYTHONDONTWRITEBYTECODE": "1", **environment}
    env = {name: value for name, value in env.items() if value is not None}
    command = [sys.executable, "-W", "error", "-c", code]
    done = subprocess.run(command, cwd=cwd, env=env, capture_output=True, timeout=120)
    done.stdout, done.stderr = done.stdout.decode(), done.stderr.decode()  # as written: \r is no \n
    return done
