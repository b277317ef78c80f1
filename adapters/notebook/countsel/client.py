# adapters/notebook/countsel/client.py -- asks the engine, and outlives it.
#
# The engine is started at the first question and again after it died; the tables that it held through this
# client are then sent again, as they were. After a fork the child starts an engine of its own.
import itertools
import json
import os
import threading
import warnings
import weakref

from .find import find_engine
from .process import Late, Process
from .refused import refused_of
from .trouble import EngineTrouble, ending

_clients = weakref.WeakSet()
AS_FINISHED = b'"ask":"hello","with":{"order":"as_finished"}}'  # a quick question need not wait for a long one


class Client:
    def __init__(self, path=None, files=None):
        self.path = find_engine(path)
        self.files = None if files is None else os.path.abspath(os.fspath(files))
        self.closed = False
        self._numbers = itertools.count(1)
        self._held = {}  # name: what was sent to hold it, so that it can be sent again
        self._forget_process()
        _clients.add(self)

    def ask(self, request, told=None, timeout=None):
        """Sends a request (a dict without id) and waits for its answer, the reply's `answer`.

        told      called with (share, doing) for each line of progress
        timeout   seconds after which the engine is given up
        Raises Refused, EngineDied, EngineMissing. Whatever interrupts the waiting cancels the request.
        """
        return self._ask(tail_of(request), request.get("ask"), told, timeout)

    def hold(self, name, request):
        """Asks a `hold` and remembers it."""
        tail = tail_of(request)
        answer = self._ask(tail, request["ask"])
        self._held[name] = tail
        return answer

    def free_name(self):
        """A name under which this client holds no table."""
        return next(name for number in itertools.count(1) if (name := f"table_{number}") not in self._held)

    def forget(self, name):
        """No longer sends this table again."""
        self._held.pop(name, None)

    def pid(self):
        """The engine's process id, None while it does not run."""
        process = self._process
        return None if process is None or process.over else process.pid

    def close(self):
        self.closed = True
        self._held.clear()
        self._end()

    def _ask(self, tail, question, told=None, timeout=None):
        process = self._running()
        number = next(self._numbers)
        pending = None
        try:
            pending = process.send(number, tail)
            while (line := pending.next_told(timeout)) is not None:
                if told:
                    progress = json.loads(line)["progress"]
                    told(progress["share"], progress["doing"])
        except Late:
            process.stop(0)
            raise EngineTrouble(f"{self.path} did not answer {question} within {timeout:g} s.") from None
        except BaseException:
            self._cancel(process, number, pending)
            raise
        if pending.reply is None:
            raise process.death(question)
        reply = json.loads(pending.reply)
        if "refused" in reply:
            raise refused_of(reply["refused"], reply.get("ask", question))
        if not isinstance(reply.get("answer"), dict):
            raise EngineTrouble(f"{self.path} does not speak as a Countsel engine does: {pending.reply[:200]!r}")
        return reply["answer"]

    def _cancel(self, process, number, pending):
        """Ends a request and waits until it has ended, so that the next one finds the engine idle."""
        cancelling = process.send(next(self._numbers), b'"ask":"cancel","of":{"id":%d}}' % number)
        cancelling.wait()
        # Refused, it was answered already, or the interruption came before it was sent.
        if pending is not None and cancelling.reply is not None and b'"answer":' in cancelling.reply:
            pending.wait()

    def _running(self):
        with self._lock:
            if self.closed:
                raise EngineTrouble("This engine was closed; make another with countsel.Engine().")
            before = self._process
            if before is not None and not before.over:
                return before
            if before is not None and not before.reported:
                how = ending(before.exit_code)
                warnings.warn(f"The engine had ended ({how}) and was started again.", RuntimeWarning, stacklevel=5)
            self._end()
            command = [self.path] if self.files is None else [self.path, "--files", self.files]
            process = self._process = Process(command)
            self._ending = weakref.finalize(self, process.stop)
            for tail in (AS_FINISHED, *self._held.values()):
                process.send(next(self._numbers), tail)
            return process

    def _end(self):
        if self._ending is not None:
            self._ending()  # stops it; at most once
        self._process = self._ending = None

    def _forget_process(self):
        self._lock = threading.Lock()
        self._process = self._ending = None

    def after_fork(self):
        """The child's part of a fork: the process, its threads and a lock perhaps held are the parent's."""
        if self._ending is not None:
            self._ending.detach()
        if self._process is not None:
            self._process.disown()
        self._forget_process()


def tail_of(request):
    """A request's line after the id, as bytes."""
    return json.dumps(request, separators=(",", ":"), allow_nan=False)[1:].encode("ascii")


def _after_fork():
    for client in list(_clients):
        client.after_fork()


if hasattr(os, "register_at_fork"):
    os.register_at_fork(after_in_child=_after_fork)
