# adapters/notebook/countsel/shared.py -- the one engine that the module's functions ask.
import threading

from .catalogue import function_of
from .engine import Engine
from .nearest import nearest

METHODS = ("ask", "hold", "quick", "release")

_lock = threading.Lock()
_engine = None


def engine():
    """The shared engine, started when it is first needed. Raises EngineMissing, EngineDied."""
    global _engine
    with _lock:
        if _engine is None:
            _engine = Engine()
        return _engine


def functions():
    """{name: function} for the module: each question, and what else an engine does with tables and lines."""
    asked = engine()
    made = {name: getattr(asked, name) for name in METHODS}
    return made | {name: function_of(asked.catalogue[name], asked._answer) for name in asked.asks()}


def hint_for(name):
    """What may have been meant by an unknown name, as the end of a sentence."""
    meant = nearest(name, _engine.asks()) if _engine else None
    return f"; did you mean {meant}?" if meant else ""
