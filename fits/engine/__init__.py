"""The numerical core: pure functions on arrays. `assess` in assess.py runs the whole of it.

Symbols follow one notation throughout: n points, J basis functions, Z the coordinates of the data with
Z ~ N(β, v I), v = 1/n in units of the errors, λ the shrinkage factors, R the estimated risk, τ the estimated
standard deviation of (loss − R), T = (d² − R)/τ.
"""

# Part of every fingerprint and result. Raise it with any change that moves a number.
VERSION = "1.1"
