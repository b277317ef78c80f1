# adapters/notebook/countsel/column.py -- a column of cells, as the wire takes it.
#
# Numbers go packed, as base64 of little-endian doubles with NaN for a blank; a pandas categorical as levels
# and codes; texts, booleans and what is mixed cell by cell. What a cell means is the engine's to judge: here
# nothing is repaired, and what has no counterpart on the wire is refused with its row.
import array
import base64
import datetime
import decimal
import math
import numbers
import sys

from .refused import Refused

EXACT = 2**53  # whole numbers up to here are doubles
PACKED = ({"f64"}, {"levels", "codes"})
SCALARS = (str, bytes, numbers.Number, datetime.date, datetime.time, datetime.timedelta, type(None))


def is_scalar(value):
    """Whether a value is one cell rather than a column of them."""
    np, pd = sys.modules.get("numpy"), sys.modules.get("pandas")
    return (
        isinstance(value, SCALARS)
        or (
            np is not None
            and (isinstance(value, np.generic) or (isinstance(value, np.ndarray) and not value.ndim))
        )
        or (pd is not None and (value is pd.NA or value is pd.NaT or isinstance(value, (pd.Period, pd.Interval))))
    )


def column(values, name):
    """(what goes on the wire, number of rows) for a Series, an array, a list or any other iterable."""
    np, pd = sys.modules.get("numpy"), sys.modules.get("pandas")
    if pd is not None and isinstance(values, (pd.Series, pd.Index, pd.api.extensions.ExtensionArray)):
        return _of_pandas(pd.Series(values), name)
    if np is not None and isinstance(values, np.ndarray):
        return _of_array(values, name)
    if isinstance(values, dict):
        if set(values) in PACKED:  # already as the wire takes it
            return values, len(values.get("codes", ())) or len(values.get("f64", "")) * 3 // 32
        raise Refused("bad_type", f"{name} is a dict; a column is a list, an array or a Series of cells.")
    if hasattr(values, "to_list"):  # a Series of another library
        values = values.to_list()
    if not hasattr(values, "__iter__"):
        raise Refused(
            "bad_type", f"{name} is a {type(values).__name__}; a column is a list, an array or a Series."
        )
    return _of_list(list(values), name)


def cell(value, name, row=0):
    """One cell as JSON has it: None, a boolean, a number or a text."""
    kind = type(value)
    if kind in (str, bool, int, type(None)):
        return value
    if isinstance(value, numbers.Real | decimal.Decimal) and not isinstance(value, numbers.Integral):
        value = float(value)
        if math.isinf(value):
            raise _refusal("bad_value", name, row, "is infinite; a cell is a finite number or blank.")
        return None if math.isnan(value) else value
    if hasattr(value, "item") and hasattr(value, "dtype"):  # NumPy's own scalars
        if value.dtype.kind in "Mm":  # nanoseconds would come out as a bare number
            value = value.astype(f"{value.dtype.kind}8[us]")
        return cell(value.item(), name, row)
    if isinstance(value, numbers.Integral):
        return int(value)
    if isinstance(value, str):
        return str(value)
    pd = sys.modules.get("pandas")
    if pd is not None:
        if value is pd.NA or value is pd.NaT:
            return None
        if isinstance(value, (pd.Period, pd.Interval)):
            return str(value)
    if isinstance(value, (datetime.date, datetime.time)):
        return value.isoformat()
    if isinstance(value, datetime.timedelta):
        hint = "Divide by the unit that is meant, for example by pandas.Timedelta('1h')."
        raise _refusal("bad_type", name, row, "is a length of time without a unit.", hint)
    raise _refusal("bad_type", name, row, f"is a {kind.__name__}; a cell is a number, a text, a date or blank.")


def pack(doubles):
    """Bytes of native doubles -> the wire's packed column."""
    if sys.byteorder == "big":
        swapped = array.array("d", doubles)
        swapped.byteswap()
        doubles = swapped.tobytes()
    return {"f64": base64.b64encode(doubles).decode("ascii")}


def level_text(value):
    """A category's name; a whole number has no point: 95.0 is "95", True is "true"."""
    if type(value).__name__ in ("bool", "bool_"):
        return "true" if value else "false"
    if isinstance(value, numbers.Real) and float(value).is_integer() and abs(value) <= EXACT:
        return str(int(value))
    if isinstance(value, (datetime.date, datetime.time)):
        return value.isoformat()
    return str(value)


def _of_pandas(series, name):
    pd, np = sys.modules["pandas"], sys.modules["numpy"]
    kind = series.dtype
    if isinstance(kind, pd.CategoricalDtype):
        return _of_categories(series.cat.categories, series.cat.codes.to_numpy(), np)
    if isinstance(kind, np.dtype):
        return _of_array(series.to_numpy(), name)
    if pd.api.types.is_bool_dtype(kind) or not pd.api.types.is_numeric_dtype(kind):
        return _of_list(series.astype(object).tolist(), name)
    if pd.api.types.is_integer_dtype(kind) and not _exact(series.dropna()):
        return _of_list(series.astype(object).tolist(), name)
    return pack(series.to_numpy(dtype="float64", na_value=math.nan).tobytes()), len(series)


def _of_categories(categories, codes, np):
    used = np.unique(codes)
    used = used[used >= 0]
    place = np.full(len(categories) + 1, -1)  # the last place serves code -1, a blank
    place[used] = np.arange(len(used))
    texts = [level_text(value) for value in _days_if_all_are(categories.take(used).tolist())]
    return {"levels": texts, "codes": place[codes].tolist()}, len(codes)


def _of_array(values, name):
    np = sys.modules["numpy"]
    if values.ndim != 1:
        raise Refused("bad_type", f"{name} has {values.ndim} dimensions; a column has one.")
    if isinstance(values, np.ma.MaskedArray):
        return _of_list(values.tolist(), name)
    kind = values.dtype.kind
    if kind == "f" or (kind in "iu" and _exact(values)):
        return pack(values.astype("=f8").tobytes()), len(values)
    if kind == "M":  # microseconds are what datetime knows
        return _of_list(values.astype("datetime64[us]").tolist(), name)
    if kind == "m":
        values = values.astype("timedelta64[us]")
    return _of_list(values.tolist(), name)


def _exact(values):
    return len(values) == 0 or (values.max() <= EXACT and values.min() >= -EXACT)


def _of_list(values, name):
    kinds = set(map(type, values))
    if kinds & {datetime.datetime} or any(issubclass(kind, datetime.datetime) for kind in kinds):
        values = _days_if_all_are(values)
        kinds = set(map(type, values))
    if not kinds <= {int, float, str, bool, type(None)} or (float in kinds and kinds & {str, bool}):
        values = [cell(value, name, row) for row, value in enumerate(values, 1)]
        kinds = set(map(type, values))
    if kinds & {int, float} and kinds <= {int, float, type(None)}:
        if int not in kinds or all(abs(value) <= EXACT for value in values if type(value) is int):
            doubles = array.array("d", (math.nan if value is None else value for value in values))
            return pack(doubles.tobytes()), len(values)
        values = [cell(value, name, row) for row, value in enumerate(values, 1)]
    return values, len(values)


def _days_if_all_are(values):
    """Moments that are all midnights are days: "2024-03-01", not "2024-03-01T00:00:00"."""
    moments = [value for value in values if isinstance(value, datetime.datetime) and value == value]  # not NaT
    if not all(moment.time() == datetime.time() and moment.tzinfo is None for moment in moments):
        return values
    return [value.date() if isinstance(value, datetime.datetime) and value == value else value for value in values]


def _refusal(code, name, row, what, hint=None):
    where = [{"column": name, "row": row}] if row else [{"column": name}]
    return Refused(code, f"Row {row} of {name} {what}" if row else f"{name} {what}", where, hint)
