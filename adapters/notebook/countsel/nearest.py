# adapters/notebook/countsel/nearest.py -- which known name was meant?
import difflib


def nearest(name, known):
    """The known name most like `name`, of equals the one most like it in length; None if none is near."""
    close = difflib.get_close_matches(name, known, 5)
    return max(close, key=lambda near: (likeness(name, near), -abs(len(near) - len(name))), default=None)


def likeness(name, near):
    return round(difflib.SequenceMatcher(None, near, name).ratio(), 3)
