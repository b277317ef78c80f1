# adapters/notebook/countsel/handle.py -- first arguments of our own: a held table, and rows as in a sheet.


class Held:
    """A table held by the engine: give it to a question in the table's place, roles by column names.

    name, rows, columns   as it is held
    """

    def __init__(self, client, name, rows, columns):
        self._client = client
        self.name, self.rows, self.columns = name, rows, list(columns)

    def belongs_to(self, client):
        return self._client is client

    def __repr__(self):
        return f"<countsel.Held {self.name!r}: {self.rows} rows, {len(self.columns)} columns>"


class Range:
    """Rows as they stand in a sheet: give it to a question in the table's place, roles by column names.

    rows     a list of rows, each a list of cells
    header   whether the first row names the columns; if not they are "1", "2", ...
    origin   the address of the top left cell, "Falls.B4": refusals and notes then name cells
    """

    def __init__(self, rows, header=True, origin=None):
        self.rows, self.header, self.origin = [list(row) for row in rows], header, origin

    def __repr__(self):
        header = "" if self.header else ", header=False"
        origin = "" if self.origin is None else f", origin={self.origin!r}"
        return f"countsel.Range({self.rows!r}{header}{origin})"
