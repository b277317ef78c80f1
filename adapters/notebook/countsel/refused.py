# adapters/notebook/countsel/refused.py -- a refusal, as Python hears of it.


class Refused(Exception):
    """The question was refused: nothing was computed, and `hint` says what to do.

    code     one of the contract's codes: "bad_count", "missing", "unknown_key", ...
    text     what was wrong, in a sentence
    where    list of {"column", "row", "cell"}; row 1 is the first row of data
    hint     what to do about it, or None
    column, row, cell   those of the first place, or None
    question the question that was asked, or None
    """

    def __init__(self, code, text, where=(), hint=None, question=None):
        super().__init__(text)
        self.code, self.text, self.hint, self.question = code, text, hint, question
        self.where = list(where)
        first = self.where[0] if self.where else {}
        self.column, self.row, self.cell = (first.get(key) for key in ("column", "row", "cell"))

    def __str__(self):
        return f"{self.text} {self.hint}" if self.hint else self.text

    def __reduce__(self):
        return type(self), (self.code, self.text, self.where, self.hint, self.question)


class UnknownArgument(Refused, TypeError):
    """A keyword that the question does not have; Python's own kind of error for it, with a hint."""


def refused_of(reply, question=None):
    """The exception for the `refused` part of a reply."""
    return Refused(
        reply.get("code", "internal"), reply.get("text", ""), reply.get("where", ()), reply.get("hint"), question
    )
