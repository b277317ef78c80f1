# adapters/notebook/countsel/catalogue.py -- a question of the engine's catalogue, as a Python function.
#
# Signature, docstring and checks are read off the entry; no question is known here by name.
import inspect
import json
import keyword

from .answer import Answer
from .handle import Range
from .nearest import nearest
from .refused import UnknownArgument

DATA = "data"
# What every question takes beside its roles and options (section 1 and 3 of the contract).
COMMON = {
    "words": 'dict for the sentences: {"event", "events", "exposure", "period"}',
    "want": "the parts of the answer wanted, a list",
    "within_s": "time limit in seconds",
    "progress": "True to see how far it is, or a function called with (share, doing)",
    "only": 'rows to keep: {"quarter": ["Q1", "Q2"]}',
}
TAKEN = "a DataFrame, a dict of columns, a list of rows, a held table, a CSV file's name below `files`, or nothing"


def function_of(entry, ask):
    """The function that asks this question: `ask(entry, data, keywords)` does the asking."""
    signature = signature_of(entry)
    known = [*names_of(entry, "roles"), *names_of(entry, "options"), *common_of(entry)]
    reads_data = DATA in signature.parameters

    def question(*given, **keywords):
        if len(given) > reads_data:
            raise TypeError(f"{entry['name']}() takes {reads_data:d} positional argument; name the others")
        if reads_data and DATA in keywords:
            if given:
                raise TypeError(f"{entry['name']}() got two values for {DATA!r}")
            given = (keywords.pop(DATA),)
        for name in keywords:
            if name not in known:
                near = nearest(name, known)
                hint = f'Did you mean "{near}"?' if near else f"Known: {', '.join(known)}."
                text = f'"{name}" is no argument of {entry["name"]}.'
                raise UnknownArgument("unknown_key", text, hint=hint, question=entry["name"])
        return ask(entry, given[0] if given else None, keywords)

    question.__name__ = question.__qualname__ = entry["name"]
    question.__module__ = __package__
    question.__signature__ = signature
    question.__doc__ = doc_of(entry)
    return question


def signature_of(entry):
    """Data first, then roles, options and the common arguments by keyword, with the engine's defaults."""
    Parameter = inspect.Parameter
    parameters = {}
    if entry["roles"] or entry["takes_columns"]:
        parameters[DATA] = Parameter(DATA, Parameter.POSITIONAL_OR_KEYWORD, default=None)
    defaults = [(name, None) for name in names_of(entry, "roles")]
    defaults += [(option["name"], option["default"]) for option in entry["options"]]
    defaults += [(name, None) for name in common_of(entry)]
    for name, default in defaults:
        if name.isidentifier() and not keyword.iskeyword(name):  # others are still taken, through **{...}
            parameters.setdefault(name, Parameter(name, Parameter.KEYWORD_ONLY, default=default))
    return inspect.Signature(parameters.values(), return_annotation=Answer)


def request_of(entry, keywords):
    """(roles, request without `of`): keywords that are None were not given."""
    given = {name: value for name, value in keywords.items() if value is not None}
    roles = {name: given.pop(name) for name in names_of(entry, "roles") if name in given}
    options = {name: given[name] for name in names_of(entry, "options") if name in given}
    request = {"ask": entry["name"]}
    if options:
        request["with"] = options
    request |= {name: given[name] for name in COMMON if name in given and name not in options}
    return roles, request


def arguments_of(request, entry):
    """(data, keywords) with which the function asks what `request`, a line of the wire, asks."""
    of = dict(request.get("of") or {})
    keywords = {name: request[name] for name in COMMON if name in request}
    if "only" in of:
        keywords["only"] = of.pop("only")
    roles = of.pop("roles", {})
    data = None
    if "columns" in of:
        data = of["columns"]
    elif "range" in of:
        data = Range(of["range"], of.get("header", True), of.get("origin"))
    elif of:
        own = set(names_of(entry, "roles"))
        data, roles = (None, of) if set(of) <= own else (of, roles)
    return data, {**roles, **(request.get("with") or {}), **keywords}


def doc_of(entry):
    """The docstring: what is asked, what it takes, what comes back, where the methods stand."""
    lines = [entry["asks"]]
    if entry["roles"] or entry["takes_columns"]:
        lines += ["", f"{DATA}: {TAKEN}."]
        if entry["takes_columns"]:
            lines.append("Columns without a role are used too.")
        if either := entry.get("either"):
            lines.append(f"Needed: {' or '.join(' and '.join(roles) for roles in either)}.")
    sections = {
        "Roles, each a column's name or the values themselves": [
            (role["name"], ("required; " if role["required"] else "") + f"{role['doc']} ({role['holds']})")
            for role in entry["roles"]
        ],
        "Options": [
            (f"{option['name']}={option['default']!r}", option_doc(option)) for option in entry["options"]
        ],
        "Also": [(name, COMMON[name]) for name in common_of(entry)],
        "Figures": [(figure["name"], figure["doc"]) for figure in entry["figures"]],
        "Tables": [
            (table["name"], f"{table['doc']}: {', '.join(names_of(table, 'columns'))}")
            for table in entry["tables"]
        ],
        "Methods": [(method["name"], method["source"]) for method in entry["methods"]],
    }
    for title, entries in sections.items():
        if entries:
            width = min(24, max(len(name) for name, _ in entries))
            lines += ["", title, *(f"    {name:{width}}  {doc}" for name, doc in entries)]
    calls = [call_text(json.loads(json.dumps(example)), entry) for example in entry["examples"]]
    if calls:
        lines += ["", "Examples", *(f"    >>> countsel.{call}" for call in calls)]
    return "\n".join(lines) + "\n"


def option_doc(option):
    """An option's line: what it is, its bounds or the values allowed, its unit."""
    doc = option["doc"]
    if option.get("allowed"):
        return f"{doc}: {', '.join(map(repr, option['allowed']))}"
    bounds = [
        f"{said} {option[key]:g}"
        for key, said in (("above", "above"), ("from", "from"), ("below", "below"), ("to", "up to"))
        if key in option
    ]
    unit = [f"in {option['unit']}"] if option.get("unit") else []
    return f"{doc} ({', '.join([option['type'], *bounds, *unit])})"


def call_text(request, entry):
    data, keywords = arguments_of(request, entry)
    said = [] if data is None else [repr(data)]
    return f"{entry['name']}({', '.join(said + [f'{name}={value!r}' for name, value in keywords.items()])})"


def names_of(entry, part):
    return [item["name"] for item in entry[part]]


def common_of(entry):
    """The common arguments that make sense: a service has no words, what reads no rows has no `only`."""
    if entry["service"]:
        return ["only"] if entry["roles"] else []
    return list(COMMON)
