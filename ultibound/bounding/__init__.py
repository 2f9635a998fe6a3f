"""Ranges of programs over boxes by subdivision: splitting trees and points, found in floating point.

Nothing here is proved: the trees and points are witnesses which the checker's own arithmetic turns into bounds.
"""
