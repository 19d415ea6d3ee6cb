"""A calculation logbook for one-electron (Hückel and tight-binding) studies.

The map, from the bottom up:

* ``errors``, ``parameters``, ``exhibits``: shared by both sides.
* kernel side, what a notebook cell runs: ``model``, ``lattices``, ``systems``, ``solver``, ``analyses``, ``registry``,
  ``cells``.
* host side, what keeps the book: ``cases``, ``notebooks``, ``store``, ``records``, ``pages``, ``workflow``.
* doors: ``website`` (a MkDocs plugin) and ``cli`` (the command ``bandbook``).

To follow one case from file to page, open ``workflow`` first.
"""

__version__ = "0.1.0"
