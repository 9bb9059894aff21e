"""Statements about features of every curve in the ball, each an optimisation: exact extremes, no samples.

The price of a statement S is min ‖β − β̂‖ over curves that satisfy S. S is possible at level α when its price is at most
the radius of that level, so that one price answers for all levels.
"""
