"""One open job: what is entered is checked, saved and answered here. No terminal, no screen.

Holds the only mutable reference to the job. Every accepted entry is on the disk before the call returns; where it
cannot be, it is kept in memory, ``save_problem`` says so, and the next entry tries again. What needs the networks
is imported on first use, so that the strip can be painted at once.
"""

from __future__ import annotations

from fieldtool.visit.entering import CellView, Entered
from fieldtool.visit.visit import Visit, warm

__all__ = ["CellView", "Entered", "Visit", "warm"]
