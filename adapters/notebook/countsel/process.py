# adapters/notebook/countsel/process.py -- one life of the engine's process, and the lines to and from it.
#
# Two threads own the pipes: one writes whole lines, one reads them and hands each to whoever waits for its
# id. A call that is interrupted therefore never leaves half a line behind, and one that waits long does not
# keep another thread's call from being answered.
#
# Ctrl-C may strike between any two steps of the asking thread, also just after a lock of Python's own making
# was taken, which then stays taken. So that thread uses only what is one step for it: a bare Lock in a
# with-statement, and SimpleQueue. Popen, which has such a lock, is left to the reading thread.
import io
import json
import os
import queue
import re
import signal
import subprocess
import tempfile
import threading

from .trouble import EngineDied, EngineMissing

HEAD = re.compile(rb'\{"id":(\d+),"(progress")?')
LAST_WORDS = 2000
PATIENCE_S = 2.0


class Late(Exception):
    """Nothing came within the time given."""


class Pending:
    """A request on its way: the progress told about it, and at last its reply (None if the engine died)."""

    def __init__(self):
        self._told = queue.SimpleQueue()
        self.reply = None
        self.over = False

    def next_told(self, timeout=None):
        """Waits for a line of progress and returns it; None once there is nothing more to wait for."""
        try:
            return self._told.get(timeout=timeout)
        except queue.Empty:
            raise Late from None

    def wait(self):
        """Waits until it is over, whatever was lost by an interruption."""
        while not self.over:
            self._told.get()

    def tell(self, line):
        self._told.put(line)

    def finish(self, reply):
        self.reply, self.over = reply, True
        self._told.put(None)


class Process:
    def __init__(self, command):
        words = tempfile.TemporaryFile(buffering=0)  # a file never fills up, as a pipe that nobody reads does
        try:
            # A session of its own: Ctrl-C in the terminal is for Python, which then cancels what is running.
            self._process = subprocess.Popen(
                command,
                stdin=subprocess.PIPE,
                stdout=subprocess.PIPE,
                stderr=words,
                bufsize=0,
                start_new_session=True,
            )
        except OSError as trouble:
            words.close()
            raise EngineMissing(f"{command[0]} cannot be run: {trouble.strerror}.") from trouble
        self.pid = self._process.pid
        self.over = False
        self.reported = False  # whether somebody has been told of its end
        self._words = words
        self._why = self._said = ""
        self._lock = threading.Lock()
        self._pending = {}
        self._outbox = queue.SimpleQueue()
        self._gone = queue.SimpleQueue()
        self._threads = [
            threading.Thread(target=work, name=f"countsel{work.__name__}", daemon=True)
            for work in (self._write, self._read)
        ]
        for thread in self._threads:
            thread.start()

    @property
    def exit_code(self):
        """As the system gave it, None while it runs."""
        return self._process.returncode

    def send(self, number, rest):
        """Sends a request: its id, and what follows the id on the line. Returns its Pending at once."""
        pending = Pending()
        with self._lock:
            if self.over:
                pending.finish(None)
                return pending
            self._pending[number] = pending
        self._outbox.put(b'{"id":%d,%b\n' % (number, rest))
        return pending

    def death(self, question):
        """The exception that reports the end of this process to whoever asked `question`."""
        self.reported = True
        return EngineDied(self.exit_code, question, self._said, self._why)

    def stop(self, patience=PATIENCE_S):
        """Ends the process: by the end of its input, and by force if it has not gone after `patience` s."""
        self.reported = True
        self._outbox.put(None)
        if threading.get_ident() in [thread.ident for thread in self._threads]:
            return  # collected as garbage there: it cannot wait for itself
        for _ in range(2):
            if self._is_gone(patience):
                return
            if self.exit_code is None:
                os.kill(self.pid, signal.SIGKILL)
            patience = PATIENCE_S

    def disown(self):
        """In a forked child: lets go of the parent's process without touching what goes on in its pipes."""
        self._process.returncode = 0
        for stream in (self._process.stdin, self._process.stdout, self._words):
            stream.close()  # unbuffered: nothing is written by closing

    def _is_gone(self, patience):
        try:
            self._gone.get(timeout=patience)
        except queue.Empty:
            return False
        self._gone.put(None)  # for whoever asks next
        return True

    def _write(self):
        descriptor = self._process.stdin.fileno()
        try:
            while (line := self._outbox.get()) is not None:
                rest = memoryview(line)
                while rest:
                    rest = rest[os.write(descriptor, rest) :]
                del line, rest  # a large line is not kept until the next one
        except OSError:
            pass  # the reader sees the end too, and says so
        self._process.stdin.close()

    def _read(self):
        lines = io.BufferedReader(self._process.stdout, 1 << 20)
        try:
            for line in lines:
                if not line.endswith(b"\n") or not self._deliver(line):
                    self._why = "It wrote what is no reply: is it a Countsel engine?"
                    self._process.kill()
                    break
        except (OSError, ValueError):
            pass
        try:
            self._process.wait(PATIENCE_S)
        except subprocess.TimeoutExpired:
            self._process.kill()
            self._process.wait()
        self._said = self._last_words()
        for stream in (lines, self._words):
            stream.close()
        with self._lock:
            self.over = True
            left, self._pending = self._pending, {}
        self._outbox.put(None)
        for pending in left.values():
            pending.finish(None)
        self._gone.put(None)

    def _deliver(self, line):
        if head := HEAD.match(line):
            number, progress = int(head[1]), head[2]
        else:
            try:
                reply = json.loads(line)
                number, progress = reply.get("id"), "progress" in reply
            except (ValueError, AttributeError):
                return False
        with self._lock:
            if number is None and self._pending:
                number = min(self._pending)  # a line whose id could not be read is answered without one
            pending = self._pending.get(number) if progress else self._pending.pop(number, None)
        if pending:
            (pending.tell if progress else pending.finish)(line)
        return True

    def _last_words(self):
        size = self._words.seek(0, os.SEEK_END)
        self._words.seek(max(0, size - LAST_WORDS))
        return self._words.read().decode("utf-8", "replace").strip()
