"""How the terminal looks: every colour and line style in one place.

Colour never carries meaning alone: whatever is coloured also says it in words.
"""

from __future__ import annotations

HEADLINE = {"good": "bold green", "bad": "bold red", "plain": "bold"}
TITLE = "bold cyan"
TABLE_HEADING = "bold"
CAUTION = "italic"
WIDTH_WITHOUT_TERMINAL = 100
"""Columns of a piped report, when nothing says otherwise."""
KEPT_WHOLE = 12
"""Cells up to this length are not wrapped."""
