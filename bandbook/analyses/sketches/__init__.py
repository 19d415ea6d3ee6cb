"""Sketches of what is solved: the sites and bonds of a system, and what cutting, finishing and changing did to a piece.

The folder's rule: ``layout`` says where sites stand in the plane and knows no pen; ``strokes`` knows how a site and a
bond look; one file a sketch.
"""

from bandbook.analyses.sketches.layout import Layout, layout_of
from bandbook.analyses.sketches.piece import sketch_piece
from bandbook.analyses.sketches.system import sketch_system

__all__ = ["Layout", "layout_of", "sketch_piece", "sketch_system"]
