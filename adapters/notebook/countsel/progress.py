# adapters/notebook/countsel/progress.py -- shows how far a long question is.
#
# In a notebook a bar, elsewhere a line on standard error that is written over. Made on the first word of
# progress: what answers at once shows nothing.
import sys
from html import escape


def teller(progress):
    """(what to call with (share, doing) or None, what to call at the end) for a `progress` argument."""
    if not progress:
        return None, lambda: None
    if callable(progress):
        return progress, lambda: None
    meter = Meter()
    return meter.told, meter.over


class Meter:
    def __init__(self):
        self._show = None

    def told(self, share, doing):
        if self._show is None:
            self._show = bar() if in_notebook() else line
        self._show(share, doing)

    def over(self):
        if self._show is line:
            sys.stderr.write("\n")


def line(share, doing):
    sys.stderr.write(f"\r{share:4.0%} {doing:<50.50}")
    sys.stderr.flush()


def bar():
    """A bar in the cell's output, moved by the function returned."""
    display = sys.modules["IPython.display"]
    handle = display.display(display.HTML(bar_html(0, "")), display_id=True)
    return lambda share, doing: handle.update(display.HTML(bar_html(share, doing)))


def bar_html(share, doing):
    return f'<progress value="{share:.3f}" max="1"></progress> {share:.0%} {escape(doing)}'


def in_notebook():
    """Whether a kernel runs this, so that its output can be changed after it was written."""
    shell = getattr(sys.modules.get("IPython"), "get_ipython", lambda: None)()
    return shell is not None and hasattr(shell, "kernel") and "IPython.display" in sys.modules
