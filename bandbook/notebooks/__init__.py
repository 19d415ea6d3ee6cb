"""From checked parameters to an executed notebook, and from there to what it gave.

The folder's rule: ``compose`` writes, ``run_notebook`` executes, ``harvest`` collects; none of them knows a case, a
title or a reference value, and a kernel opens no file of the book.
"""

from bandbook.notebooks.compose import compose, seed_of
from bandbook.notebooks.harvest import Harvest, harvest
from bandbook.notebooks.run import drawing_runner, local_runner, run_notebook

__all__ = ["Harvest", "compose", "drawing_runner", "harvest", "local_runner", "run_notebook", "seed_of"]
