"""How the terminal looks: every colour and line style in one place.

Colour only helps to find the parts; it never says whether an answer is good or bad.
"""

from __future__ import annotations

HEADLINE = "bold"
TITLE = "bold cyan"
TABLE_HEADING = "bold"
CAUTION = "italic"
WIDTH_WITHOUT_TERMINAL = 100
"""Columns of a piped report, when nothing says otherwise."""
KEPT_WHOLE = 12
"""Cells up to this length are not wrapped."""
