# adapters/notebook/countsel/engine.py -- an engine of one's own, each question a method.
from .answer import Answer
from .catalogue import function_of, request_of
from .client import Client
from .data import all_columns, of_data, plain
from .handle import Held
from .nearest import nearest
from .progress import teller
from .refused import Refused
from .trouble import EngineTrouble

START_S = 30  # a program that says nothing for so long is no engine
SHOWN_ROWS = 10_000  # up to here the rounded texts come along, for the notebook's tables
PARTS = ["say", "figures", "tables", "heads", "shown", "headline", "picture", "method", "notes", "stamp"]
# Services that serve the client itself, or that it offers in its own way below.
OWN = {"hold", "release", "quick", "cancel", "goodbye"}


class Engine:
    """A Countsel engine, started now and ended by close() or the end of a with-block.

    path    the executable; by default COUNTSEL_ENGINE, the checkout's build/release, PATH
    files   a folder below which tables may be named as CSV files; by default none

    Each question is a method: engine.how_often(df, count="bursts"). It may be asked from several threads.
    """

    def __init__(self, path=None, files=None):
        self._client = Client(path, files)
        try:
            listed = self._client.ask({"ask": "questions"}, timeout=START_S)
            if "questions" not in listed:
                raise EngineTrouble(f"{self._client.path} lists no questions: is it a Countsel engine?")
        except BaseException:
            self._client.close()
            raise
        self._catalogue = {entry["name"]: entry for entry in listed["questions"]}

    def __enter__(self):
        return self

    def __exit__(self, *_):
        self.close()

    def close(self):
        """Ends the engine; what it held is gone."""
        self._client.close()

    @property
    def path(self):
        """The executable that is asked."""
        return self._client.path

    @property
    def pid(self):
        """The engine's process id; None while it does not run."""
        return self._client.pid()

    @property
    def catalogue(self):
        """{question: its entry in the engine's catalogue}"""
        return self._catalogue

    def asks(self):
        """The names of the questions that are methods."""
        return [name for name in self._catalogue if name not in OWN]

    def __getattr__(self, name):
        catalogue = self.__dict__.get("_catalogue", {})
        if name in catalogue and name not in OWN:
            return function_of(catalogue[name], self._answer)
        near = None if name.startswith("_") else nearest(name, [*catalogue, *dir(type(self))])
        hint = f"; did you mean {near}?" if near else ""
        raise AttributeError(f"the engine has no question {name!r}{hint}")

    def __dir__(self):
        return [*super().__dir__(), *self.asks()]

    def ask(self, request, progress=None):
        """Asks a request of the wire as it is, a dict with "ask", "of", "with", ... Returns its Answer."""
        request = plain({key: value for key, value in request.items() if key not in ("id", "progress")}, "request")
        return self._send(request, progress)

    def quick(self, line, words=None, want=None, within_s=None):
        """Answers a line as spoken in a meeting: "7 in 1200 per 1000", "14 in 2300 vs 5 in 2100".

        The request that it was read as is in the answer's `more`.
        """
        given = {"words": words, "want": want or PARTS, "within_s": within_s}
        given = {key: plain(value, key) for key, value in given.items() if value is not None}
        return self._send({"ask": "quick", "of": {"line": line}, **given})

    def hold(self, data, name=None):
        """Sends a table once; the handle returned stands for it as a first argument.

        data   a DataFrame, a dict of columns, or the name of a CSV file below `files`
        name   what the engine calls it; by default a name not in use
        """
        if name is None:
            name = self._client.free_name()
        of, _ = all_columns(data)
        answer = self._client.hold(name, {"ask": "hold", "of": of, "with": {"name": name}})
        columns = answer.get("tables", {}).get("columns", {}).get("name", ())
        return Held(self._client, name, int(answer.get("figures", {}).get("rows", 0)), columns)

    def release(self, table):
        """Drops a held table, given by its handle or its name."""
        name = self._own(table).name if isinstance(table, Held) else table
        self._client.forget(name)
        return self._send({"ask": "release", "with": {"name": name}})

    def _answer(self, entry, data, keywords):
        """What a question's function does: see catalogue.function_of."""
        roles, request = request_of(entry, {key: value for key, value in keywords.items() if key != "progress"})
        only = request.pop("only", None)
        request = plain(request, entry["name"])
        rows = None
        if data is not None or roles or only is not None:
            of, rows = of_data(self._own(data), roles, entry, only)
            request["of"] = of
        if "want" not in request and not entry["service"] and rows is not None and rows <= SHOWN_ROWS:
            request["want"] = PARTS
        return self._send(request, keywords.get("progress"))

    def _send(self, request, progress=None):
        told, over = teller(progress)
        if told:
            request["progress"] = True
        try:
            reply = self._client.ask(request, told)
        finally:
            over()
        # A quick line is answered as the question that it was read as.
        question = reply.get("read_as", request).get("ask", request.get("ask"))
        return Answer(question, reply, self._catalogue.get(question))

    def _own(self, data):
        """The first argument, unless it is a table that another engine holds."""
        if isinstance(data, Held) and not data.belongs_to(self._client):
            raise Refused("not_found", f'"{data.name}" is held by another engine.', hint="Hold it here first.")
        return data
