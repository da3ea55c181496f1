"""Which edition the figures follow, and the sentence that says so wherever they are shown."""

from __future__ import annotations

__all__ = ["EDITION", "EDITION_SENTENCE", "EDITION_SHORT", "FOLDER", "RULE_SET"]

EDITION = "BS 7671:2018+A2:2022"

FOLDER = "bs7671_2018_a2_2022"
"""Folder of the edition in force here; a new edition is a new folder beside it."""

RULE_SET = "2026-12"
"""Name of this catalogue of rules: kept with every verdict, so that an old one can be told from a new one."""

EDITION_SENTENCE = (
    "Figures follow BS 7671:2018+A2:2022. BS 7671:2018+A4:2026 is in force since 15 October 2026: check against it."
)

EDITION_SHORT = "Follows BS 7671:2018+A2:2022. A4:2026 is in force: check."
"""The same within the reminder row of the screen, 58 cells."""
