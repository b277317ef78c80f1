# adapters/notebook/countsel/look.py -- how an answer looks in a notebook.
#
# The sentence first, then the tables under their headings for people, then what to beware of; the rest is
# folded away. Colours are the notebook's own, light or dark. Every text is escaped: labels come from data.
from html import escape

MOST_ROWS = 40
STYLE = """<style>
.countsel { max-width: 60em; line-height: 1.4; }
.countsel p { margin: .3em 0 .6em; }
.countsel .say { font-size: 1.1em; }
.countsel table { border-collapse: collapse; margin: .2em 0 .8em; border: 0; }
.countsel th, .countsel td { padding: .2em .8em .2em 0; border: 0; text-align: right; vertical-align: top;
  font-variant-numeric: tabular-nums; background: transparent; }
.countsel thead th { border-bottom: 1px solid; font-weight: 600; max-width: 11em; white-space: normal; }
.countsel .text { text-align: left; }
.countsel .aside { opacity: .75; font-size: .92em; }
.countsel ul { margin: .2em 0 .6em; padding-left: 1.3em; }
</style>"""


def html_of(reply):
    """An answer, as it came, as HTML."""
    parts = [STYLE, '<div class="countsel">', f'<p class="say">{escape(reply.get("say", ""))}</p>']
    for name, table in reply.get("tables", {}).items():
        parts.append(
            table_html(name, table, reply.get("heads", {}).get(name, {}), reply.get("shown", {}).get(name))
        )
    notes = reply.get("notes", [])
    if notes:
        parts += ["<ul>", *(f"<li>{escape(note.get('text', ''))}</li>" for note in notes), "</ul>"]
    parts += [*folded(reply), "</div>"]
    return "\n".join(parts)


def table_html(name, table, heads, shown):
    """A table; numbers to the right, rounded for people where the engine said how."""
    columns = list(table)
    rows = max((len(cells) for cells in table.values()), default=0)
    texts = {
        column: any(isinstance(cell, str) and cell not in ("inf", "-inf") for cell in cells)
        for column, cells in table.items()
    }
    kind = {column: ' class="text"' if texts[column] else "" for column in columns}
    shown = shown or {}
    cells = {
        column: shown.get(column) or [plain_text(cell) for cell in table[column][:MOST_ROWS]] for column in columns
    }
    lines = [f'<table aria-label="{escape(name)}"><thead><tr>']
    lines += [f"<th{kind[column]}>{escape(heads.get(column) or column)}</th>" for column in columns]
    lines.append("</tr></thead><tbody>")
    for row in range(min(rows, MOST_ROWS)):
        lines.append("<tr>" + "".join(f"<td{kind[c]}>{escape(cells[c][row])}</td>" for c in columns) + "</tr>")
    lines.append("</tbody></table>")
    if rows > MOST_ROWS:
        lines.append(f'<p class="aside">{rows - MOST_ROWS:,} more rows in .tables[{escape(repr(name))}]</p>')
    return "\n".join(lines)


def folded(reply):
    """Figures, methods and the stamp, behind one line to open."""
    figures, methods, stamp = reply.get("figures", {}), reply.get("method", []), reply.get("stamp") or {}
    if not figures and not methods:
        return
    yield '<details class="aside"><summary>Figures and methods</summary>'
    if figures:
        yield "<table><tbody>"
        for name, value in figures.items():
            yield f'<tr><td class="text">{escape(name)}</td><td>{escape(plain_text(value))}</td></tr>'
        yield "</tbody></table>"
    if methods:
        yield "<ul>"
        for method in methods:
            yield f"<li>{escape(method.get('name', ''))}: {escape(method.get('source', ''))}</li>"
        yield "</ul>"
    if stamp:
        yield f"<p>Countsel {escape(str(stamp.get('countsel', '')))}, data {escape(str(stamp.get('data', '')))}</p>"
    yield "</details>"


def plain_text(value):
    """A cell without the engine's rounding: four digits, and those before the point in full."""
    if value is None:
        return ""
    if isinstance(value, bool):
        return "yes" if value else "no"
    if value in ("inf", "-inf"):
        return "no limit"
    if isinstance(value, int) or (isinstance(value, float) and value.is_integer() and abs(value) < 1e15):
        return f"{int(value):,}"
    if isinstance(value, float) and 1000 <= abs(value) < 1e15:
        return f"{value:,.0f}"
    return f"{value:.4g}" if isinstance(value, float) else str(value)
