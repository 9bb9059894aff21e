"""Uploaded bytes turned into clean numbers, with every fault named by file, line and column.

Nothing is imported here: the limited child process sets its limits before NumPy is loaded.
"""
