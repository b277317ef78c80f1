# adapters/notebook/countsel/handle.py -- a table that the engine holds, as a first argument.


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
