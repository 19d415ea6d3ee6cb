"""The questions that a study can ask.

The folder's rule: one file a question (fields, ``compute``, ``report``, ``tabulate``, ``draw``, ``warn``), figures
beside it where they need room, one line in :data:`ANALYSES`. Numbers come from the solver; words are written from them.
"""

from bandbook.analyses.analysis import Analysis, Asked
from bandbook.analyses.bands import BANDS
from bandbook.analyses.length_series import LENGTH_SERIES
from bandbook.analyses.levels import LEVELS

#: Every question, in the order of the manual.
ANALYSES: tuple[Analysis, ...] = (LEVELS, BANDS, LENGTH_SERIES)

__all__ = ["ANALYSES", "Analysis", "Asked"]
