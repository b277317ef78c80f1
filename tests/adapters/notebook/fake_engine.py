#!/usr/bin/env python3
# tests/adapters/notebook/fake_engine.py -- an engine that does what a test asks for, on the wire's terms.
#
# Its questions are invented, so that an adapter which knew the real ones by name would fail here.
#   echo    answers with the request itself (more.request)
#   linger  tells its progress until it is cancelled, or for `with.turns` turns
#   die     ends at once, with exit code 7 and last words, or killed by `with.signal`
#   babble  writes a line that is no reply
import json
import os
import sys
import threading


def entry(name, **parts):
    empty = {key: [] for key in ("roles", "options", "figures", "tables", "methods", "examples")}
    return (
        {"name": name, "asks": f"{name}?", "service": False, "takes_columns": False, "headline": None}
        | empty
        | parts
    )


def role(name, required=False):
    return {"name": name, "required": required, "holds": "number", "doc": f"the {name}"}


def option(name, kind="number", default=None, **parts):
    return {"name": name, "type": kind, "default": default, "doc": f"the {name}"} | parts


CATALOGUE = [
    entry(
        "echo",
        roles=[role("pips", required=True), role("weight"), role("label")],
        options=[
            option("depth", default=0.5, above=0, below=1, unit="fathoms"),
            option("way", "choice", "up", allowed=["up", "down"]),
            option("from", "text"),
        ],
        figures=[
            {"name": "pips", "style": "count", "doc": "all pips"},
            {"name": "top", "style": "rate", "doc": "the upper end"},
        ],
        tables=[
            {
                "name": "rows",
                "doc": "one row each",
                "columns": [
                    {"name": "label", "style": "text"},
                    {"name": "pips", "style": "count"},
                    {"name": "high", "style": "rate"},
                ],
            }
        ],
        methods=[{"name": "listening", "source": "a test"}],
        examples=[{"ask": "echo", "of": {"pips": [1, 2], "label": ["a", "b"]}, "with": {"depth": 0.25}}],
    ),
    entry("mingle", takes_columns=True, roles=[role("pips", required=True)]),
    entry("linger", options=[option("turns", "whole", 100000)]),
    entry("die", options=[option("signal", "whole")]),
    entry("babble"),
    entry(
        "hello", service=True, options=[option("order", "choice", "as_asked", allowed=["as_asked", "as_finished"])]
    ),
    entry("hold", service=True, takes_columns=True, options=[option("name", "text")]),
    entry("held", service=True),
    entry("cancel", service=True),
]

out = threading.Lock()
held, lingering = {}, {}


def say(line):
    with out:
        print(json.dumps(line, separators=(",", ":")), flush=True)


def answer(heard, **parts):
    say({"id": heard["id"], "ask": heard["ask"], "answer": {"say": heard["ask"]} | parts})


def refuse(request, code, text, **parts):
    say({"id": request["id"], "ask": request["ask"], "refused": {"code": code, "text": text, "where": []} | parts})


def linger(request, cancelled):
    turns = request.get("with", {}).get("turns", 100000)
    for turn in range(turns):
        if request.get("progress"):
            say({"id": request["id"], "progress": {"share": turn / turns, "doing": "lingering"}})
        if cancelled.wait(0.005):
            return refuse(request, "cancelled", "The request was cancelled.")
    answer(request)


def take(request):
    given, options = request.get("of", {}), request.get("with", {})
    match request["ask"]:
        case "questions":
            answer(request, questions=CATALOGUE)
        case "hold":
            held[options["name"]] = given["columns"]
            columns = {"name": list(given["columns"])}
            answer(request, figures={"rows": 2, "columns": len(columns["name"])}, tables={"columns": columns})
        case "held":
            answer(request, tables={"held": {"name": list(held)}}, more=held)
        case "release":
            held.pop(options["name"], None)
            answer(request)
        case "linger":
            lingering[request["id"]] = cancelled = threading.Event()
            threading.Thread(target=linger, args=(request, cancelled), daemon=True).start()
        case "cancel":
            running = lingering.get(given["id"])
            if running is None:
                refuse(request, "not_found", "No request with this id is pending.")
            else:
                running.set()
                answer(request)
        case "die":
            if "signal" in options:
                os.kill(os.getpid(), options["signal"])
            print("farewell", file=sys.stderr, flush=True)
            os._exit(7)
        case "babble":
            with out:
                print("this is not JSON", flush=True)
        case "refuse":
            where = [{"column": "pips", "row": 4, "cell": "B5"}, {"column": "pips", "row": 9}]
            refuse(request, "bad_count", "Row 4 of pips is -2.", where=where, hint="Count from 0.")
        case _:
            answer(request, request=request, pid=os.getpid())


for text in sys.stdin:
    take(json.loads(text))
