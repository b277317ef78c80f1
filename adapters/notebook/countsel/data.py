# adapters/notebook/countsel/data.py -- a first argument and its roles, as the request's `of`.
#
# A frame's columns are sent where a role or `only` names them, and all of them only to a question that uses
# columns without a role. Values given for a role travel as a column of their own.
import os
import sys
from collections.abc import Mapping

from .column import cell, column, is_scalar
from .handle import Held, Range
from .refused import Refused


def of_data(data, roles, entry, only=None):
    """(`of`, rows or None where only the engine knows them).

    data    a DataFrame, a dict of columns, a Range or a list of rows, a Held, a file's name, or None
    roles   {role: a column's name, or its values}
    entry   the question, from the catalogue
    only    {column: values to keep} or None
    """
    if is_rows(data):
        data = Range(data)
    if data is None:
        of, rows = _direct(roles)
    elif isinstance(data, Range):
        of, rows = {**of_range(data), **_named(roles, "a range")}, max(0, len(data.rows) - data.header)
    elif isinstance(data, Held):
        of, rows = {"held": data.name, **_named(roles, "a held table")}, data.rows
    elif isinstance(data, (str, os.PathLike)):
        of, rows = {"file": os.fspath(data), **_named(roles, "a file")}, None
    else:
        of, rows = _columns(data, roles, entry, only)
    if only is not None:
        of["only"] = plain(only, "only")
    return of, rows


def all_columns(data):
    """A whole table, for `hold`: ({"columns": ...} or another form, rows)."""
    if is_rows(data):
        data = Range(data)
    if isinstance(data, Range):
        return of_range(data), max(0, len(data.rows) - data.header)
    if isinstance(data, (str, os.PathLike)):
        return {"file": os.fspath(data)}, None
    if data is None or isinstance(data, Held):
        raise Refused(
            "missing", "hold needs a table.", hint="Give a DataFrame, a dict of columns or a file's name."
        )
    sent = [(name, *column(values, name)) for name, _, values in frame(data)]
    return {"columns": {name: cells for name, cells, _ in sent}}, sent[0][2] if sent else 0


def is_rows(data):
    """Whether these are rows of cells, as pasted from a sheet."""
    return (
        isinstance(data, (list, tuple)) and len(data) > 0 and all(isinstance(row, (list, tuple)) for row in data)
    )


def of_range(data):
    """A Range as the wire takes it."""
    rows = [[cell(value, f"row {number}") for value in row] for number, row in enumerate(data.rows, 1)]
    of = {"range": rows}
    if not data.header:
        of["header"] = False
    if data.origin is not None:
        of["origin"] = data.origin
    return of


def frame(data):
    """A table as a list of (name as text, name as given, values)."""
    pd = sys.modules.get("pandas")
    if pd is not None and isinstance(data, pd.DataFrame):
        table = [(str(key), key, data.iloc[:, i]) for i, key in enumerate(data.columns)]
    elif isinstance(data, Mapping):
        table = [(str(key), key, values) for key, values in data.items()]
    elif hasattr(data, "columns") and hasattr(data, "__getitem__"):
        table = [(str(key), key, data[key]) for key in data.columns]
    else:
        raise Refused(
            "bad_type",
            f"The data are a {type(data).__name__}.",
            hint="Give a DataFrame, a dict of columns, a list of rows, a held table, or the name of a file.",
        )
    seen = set()
    for name, _, _ in table:
        if name in seen:
            raise Refused(
                "bad_value",
                f'Two columns are named "{name}".',
                [{"column": name}],
                "Give each column a name of its own.",
            )
        seen.add(name)
    # A bare cell in the place of a column is a table of one row.
    return [(name, key, [values] if is_scalar(values) else values) for name, key, values in table]


def plain(value, name):
    """An option's value with nothing but JSON in it."""
    if isinstance(value, Mapping):
        return {str(key): plain(inner, f"{name}.{key}") for key, inner in value.items()}
    if isinstance(value, float) and value in (float("inf"), float("-inf")):
        return "inf" if value > 0 else "-inf"
    if is_scalar(value):
        return cell(value, name)
    if hasattr(value, "tolist"):
        value = value.tolist()
    if hasattr(value, "__iter__"):
        return [plain(inner, name) for inner in value]
    raise Refused("bad_type", f"{name} is a {type(value).__name__}, which cannot be sent.")


def _direct(roles):
    of, rows = {}, None
    for role, values in roles.items():
        if is_scalar(values):
            of[role], count = cell(values, role), 1
        else:
            of[role], count = column(values, role)
        rows = count if rows is None else rows
    return of, rows


def _named(roles, what):
    for role, name in roles.items():
        if not isinstance(name, str):
            raise Refused(
                "bad_type",
                f"{role} is a {type(name).__name__}; with {what} a role is given by the name of a column.",
            )
    return {"roles": dict(roles)} if roles else {}


def _columns(data, roles, entry, only):
    table = frame(data)
    names = {name for name, _, _ in table}
    keys = {key: name for name, key, _ in table if is_scalar(key)}
    given, cast = [], {}
    for role, value in roles.items():
        if isinstance(value, str) or (is_scalar(value) and value in keys):
            cast[role] = keys.get(value, value)
            continue
        _same_rows(value, data, role)
        own = role if role not in names else f"{role} (given)"
        cast[role] = own
        given.append((own, [value] if is_scalar(value) else value))

    if entry["takes_columns"]:
        wanted = names
    else:
        wanted = set(cast.values()) if cast else {role["name"] for role in entry["roles"]}
        wanted |= {str(name) for name in only or ()}
    # With a name that is not there the answer is a refusal that suggests one: the names alone are enough.
    amiss = not set(cast.values()) <= names | {own for own, _ in given}
    columns, rows = {}, None
    for name, values in [(name, values) for name, _, values in table] + given:
        if amiss:
            columns[name] = []
        elif name in wanted or name in cast.values():
            columns[name], count = column(values, name)
            rows = count if rows is None else rows
    return {"columns": columns, **({"roles": cast} if cast else {})}, rows


def _same_rows(values, data, role):
    """A Series beside a DataFrame goes by position; where its index says otherwise, nothing is guessed."""
    pd = sys.modules.get("pandas")
    if pd is None or not isinstance(data, pd.DataFrame) or not isinstance(values, pd.Series):
        return
    if len(values) == len(data) and not values.index.equals(data.index):
        raise Refused(
            "bad_value",
            f"{role} is a Series whose index is not the table's.",
            [{"column": role}],
            "Give its .to_numpy() to go by position, or reindex it.",
        )
