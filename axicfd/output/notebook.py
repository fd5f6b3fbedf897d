"""How a result shows itself in a notebook: its headline as an HTML table, with its cautions."""

from __future__ import annotations

from html import escape
from typing import Any

from axicfd.output.headline import headline
from axicfd.output.shown import shown_units
from axicfd.output.verdicts import sentences


def html(result: Any) -> str:
    """An HTML fragment without scripts or outside resources; users' words are escaped."""
    summary = result.summary
    parts = [f"<p><b>{escape(str(summary.get('title') or 'untitled'))}</b></p>"]
    if not summary.get("converged", True):
        parts.append("<p><b>NOT CONVERGED</b>: the numbers are where the iteration stopped.</p>")
    cells = []
    for line in headline(summary, shown_units(result.case)):
        words = (line.owner, line.row.label, " ".join(filter(None, (line.text, line.bar))), line.place)
        cells.append("<tr>" + "".join(f'<td style="text-align:left">{escape(word)}</td>' for word in words) + "</tr>")
    parts.append(f"<table>{''.join(cells)}</table>")
    limits = "".join(f"<li>{escape(sentence)}</li>" for _, sentence in sentences(result, shown_units(result.case)))
    parts += [f"<p>Limits</p><ul>{limits}</ul>"] if limits else []
    cautions = summary.get("cautions") or []
    if cautions:
        items = "".join(f"<li>{escape(_words(caution))}</li>" for caution in cautions)
        parts.append(f"<p>Cautions</p><ul>{items}</ul>")
    return "".join(parts)


def _words(caution: dict[str, Any]) -> str:
    reason = caution.get("accepted")
    return f"{caution['text']} Accepted: {reason}" if reason else str(caution["text"])
