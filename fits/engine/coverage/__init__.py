"""How often the sets hold the truth: the engine judged by repeats whose true curve is known.

curves.py says what is true and what is wrong, cells.py which settings are tried, repeats.py runs one setting.
"""
