# adapters/notebook/countsel/__init__.py -- rates of events, asked of the Countsel engine.
#
# The questions are functions of this module, made at import from the catalogue of one shared engine. Where no
# engine is found the import still works; the first use then looks again, and says what is missing.
"""Counts over exposure: how often, how sure, which is higher, what drives it.

    import countsel
    answer = countsel.how_often(df, count="bursts", exposure="km_years", group="material", per=100)
    print(answer.say)
    answer.tables["rates"]

countsel.questions() lists what can be asked; help(countsel.how_often) tells about one question.
"""
from . import shared
from .answer import Answer
from .engine import Engine
from .handle import Held, Range
from .refused import Refused, UnknownArgument
from .trouble import EngineDied, EngineMissing, EngineTrouble
from .version import __version__

__all__ = [
    "Answer",
    "Engine",
    "EngineDied",
    "EngineMissing",
    "EngineTrouble",
    "Held",
    "Range",
    "Refused",
    "UnknownArgument",
]


def _make_functions():
    functions = shared.functions()
    globals().update(functions)
    __all__.extend(name for name in functions if name not in __all__)


def __getattr__(name):
    if not name.startswith("_"):
        if "quick" not in globals():
            _make_functions()  # an engine may have been built since; EngineMissing says what to do if not
        if name in globals():
            return globals()[name]
    raise AttributeError(f"module 'countsel' has no attribute {name!r}{shared.hint_for(name)}")


try:
    _make_functions()
except EngineTrouble:
    pass
