# adapters/notebook/countsel/trouble.py -- what can go wrong with the engine itself, apart from refusals.
import signal


class EngineTrouble(RuntimeError):
    """The engine could not be asked; the question and its data are not at fault."""


class EngineMissing(EngineTrouble):
    """No engine was found, or what was found cannot be run."""


class EngineDied(EngineTrouble):
    """The engine ended before it answered. The next call starts it again.

    exit_code   as the system gave it; below 0 the number of the signal that killed it
    question    what was being asked
    said        the end of what it wrote for people, "" as a rule
    """

    def __init__(self, exit_code, question, said="", why=""):
        self.exit_code, self.question, self.said, self.why = exit_code, question, said, why
        text = f"The engine ended ({ending(exit_code)}) before it answered {question}."
        if why:
            text += f" {why}"
        if said:
            text += f" Its last words: {said.splitlines()[-1]}"
        text += (
            " The next call starts it again, with the tables it held."
            " Should the same question end it once more, ask about fewer rows or terms, and report the request."
        )
        super().__init__(text)

    def __reduce__(self):
        return EngineDied, (self.exit_code, self.question, self.said, self.why)


def ending(exit_code):
    """How a process ended, in words."""
    if exit_code is None:
        return "no longer answering"
    if exit_code >= 0:
        return f"exit code {exit_code}"
    try:
        return f"killed by {signal.Signals(-exit_code).name}"
    except ValueError:
        return f"killed by signal {-exit_code}"
