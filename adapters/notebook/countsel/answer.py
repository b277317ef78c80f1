# adapters/notebook/countsel/answer.py -- an answer, as Python likes it.
#
# Tables are made when they are looked at: who wants the sentence only does not wait for pandas.
import functools
import importlib.util
import math

from . import look

TEXTS = {"text", "level"}  # the catalogue's styles of what is no number
WHOLES = {"count", "whole"}
ENDS = {"inf": math.inf, "-inf": -math.inf, None: math.nan}


class Answer:
    """What the engine answered.

    say        one or two sentences
    figures    {name: number}; nan where there is no value, inf where there is no limit
    tables     {name: DataFrame}, or {name: {column: list}} without pandas
    heads      {table: {column: heading for people, with its unit}}
    shown      {table: {column: rounded texts}}, where asked for
    headline   the name of the figure that a single cell should show
    picture    what to draw, a dict, or None
    method     list of {"name", "source"}
    notes      list of {"code", "text", "where"}
    stamp      {"countsel": version, "data": digest}
    more       parts that only some questions have, such as "read_as"
    """

    def __init__(self, question, reply, entry=None):
        self.question = question
        self._reply, self._entry = reply, entry or {}
        self.say = reply.get("say", "")
        self.heads = reply.get("heads", {})
        self.headline = reply.get("headline")
        self.picture = reply.get("picture")
        self.method = reply.get("method", [])
        self.notes = reply.get("notes", [])
        self.stamp = reply.get("stamp")
        self.shown = reply.get("shown", {})
        known = ("say", "figures", "tables", "heads", "shown", "headline", "picture", "method", "notes", "stamp")
        self.more = {name: value for name, value in reply.items() if name not in known}

    @functools.cached_property
    def figures(self):
        styles = styles_of(self._entry.get("figures", ()))
        figures = self._reply.get("figures", {})
        return {name: figure(value, styles.get(name)) for name, value in figures.items()}

    @functools.cached_property
    def tables(self):
        specs = {table["name"]: styles_of(table["columns"]) for table in self._entry.get("tables", ())}
        tables = {
            name: {column: cells_of(cells, specs.get(name, {}).get(column)) for column, cells in table.items()}
            for name, table in self._reply.get("tables", {}).items()
        }
        pandas = pandas_if_there()
        if pandas is None:
            return tables
        return {name: pandas.DataFrame(frame_columns(pandas, table)) for name, table in tables.items()}

    def __str__(self):
        return self.say

    def __repr__(self):
        return f"<countsel.Answer to {self.question}: {self.say}>"

    def _repr_html_(self):
        return look.html_of(self._reply)


def styles_of(specs):
    return {spec["name"]: spec["style"] for spec in specs}


def figure(value, style):
    """A figure as a number, unless it is a text or a truth."""
    if style in TEXTS or isinstance(value, bool):
        return value
    return ENDS.get(value, value)


def cells_of(cells, style):
    """A column's cells: floats with nan and inf, whole numbers where all of a count's are, or what was sent."""
    if style in TEXTS or (style is None and not looks_numeric(cells)):
        return cells
    if style in WHOLES and all(type(value) is int and abs(value) < 2**63 for value in cells):
        return cells
    try:
        return [float(ENDS.get(value, value)) for value in cells]
    except ValueError:  # texts where the catalogue promises numbers stay readable
        return cells


def looks_numeric(cells):
    """For a column that the catalogue does not list: numbers, and nothing but numbers and their ends."""
    return any(type(value) in (int, float) for value in cells) and all(
        type(value) in (int, float) or value in ENDS for value in cells
    )


def frame_columns(pandas, table):
    """Columns with the type that they have here: pandas would take an empty one for objects."""
    return {
        name: pandas.Series(cells, dtype=object if any(isinstance(cell, str) for cell in cells) else None)
        if cells
        else pandas.Series(cells, dtype=float)
        for name, cells in table.items()
    }


def pandas_if_there():
    """The pandas package, or None where it is not installed or cannot be imported."""
    try:
        if importlib.util.find_spec("pandas") is None:
            return None
        import pandas
    except (ImportError, ValueError):
        return None
    return pandas
