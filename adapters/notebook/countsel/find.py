# adapters/notebook/countsel/find.py -- which engine is asked?
#
# In this order: the path given, COUNTSEL_ENGINE, build/release/countsel of the checkout one stands in (the
# working folder's, then the package's own), PATH. What is named outright must be there: another engine than
# the one named would give answers of another version without a word.
import os
import shutil
from pathlib import Path

from .trouble import EngineMissing

NAME = "countsel"
BUILD = "cmake --preset release && cmake --build --preset release"


def find_engine(path=None):
    """The engine's path as text. Raises EngineMissing, which says where it was looked for."""
    named = [(path, "the path given")] if path is not None else []
    if os.environ.get("COUNTSEL_ENGINE"):
        named.append((os.environ["COUNTSEL_ENGINE"], "COUNTSEL_ENGINE"))
    for candidate, said_by in named:
        candidate = Path(candidate).expanduser()
        if not candidate.is_file():
            raise EngineMissing(f"There is no engine at {candidate}, which {said_by} names.")
        if not os.access(candidate, os.X_OK):
            raise EngineMissing(f"{candidate}, which {said_by} names, cannot be run: it is not executable.")
        return str(candidate.resolve())

    folders = [folder for start in (Path.cwd(), Path(__file__).parent) if (folder := checkout(start.resolve()))]
    for folder in folders:
        built = folder / "build" / "release" / NAME
        if built.is_file() and os.access(built, os.X_OK):
            return str(built)
    if on_path := shutil.which(NAME):
        return str(Path(on_path).resolve())
    where = folders[0] if folders else "a checkout of Countsel"
    seen = " and ".join(map(str, dict.fromkeys(folders))) or "the checkout (no checkout here)"
    raise EngineMissing(
        f"The Countsel engine was not found. Build it with `{BUILD}` in {where}, or set COUNTSEL_ENGINE to it."
        f" Looked at: the path given (none), COUNTSEL_ENGINE (not set), build/release of {seen}, PATH."
    )


def checkout(start):
    """The nearest folder from `start` upwards that is a checkout of Countsel, or None."""
    for folder in (start, *start.parents):
        if (folder / "adapters" / "notebook" / NAME).is_dir() and (folder / "CMakePresets.json").is_file():
            return folder
    return None
