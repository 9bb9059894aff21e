"""How much of a file is read at all. Each is checked before anything that it bounds is built."""

from dataclasses import dataclass

MAXIMUM_BYTES = 50 * 1024 * 1024
MAXIMUM_ROWS = 1_000_000
MAXIMUM_COVARIANCE_POINTS = 5000
# Weights of a window matrix, 80 MB, and the x that it may look at.
MAXIMUM_WINDOW_WEIGHTS = 10_000_000
MAXIMUM_WINDOW_GRID = 20_000
# Header, comments and blank lines that may stand beside the rows.
SPARE_LINES = 10_000
MAXIMUM_NAME_LENGTH = 200
MAXIMUM_HEADER_LENGTH = 80

# Of the child process that reads uploads for the web pages.
CHILD_ADDRESS_SPACE = 1024 * 1024 * 1024
CHILD_CPU_SECONDS = 60
CHILD_WALL_SECONDS = 75
CHILD_FILE_BYTES = 512 * 1024 * 1024
CHILD_OPEN_FILES = 64


@dataclass(frozen=True)
class TableLimits:
    """The largest table of one kind."""

    rows: int
    columns: int
    line_length: int
    cells: int | None = None  # rows × columns


DATA_TABLE = TableLimits(rows=MAXIMUM_ROWS, columns=200, line_length=20_000)
# 5000 numbers of up to 30 characters each.
COVARIANCE_TABLE = TableLimits(
    rows=MAXIMUM_COVARIANCE_POINTS, columns=MAXIMUM_COVARIANCE_POINTS, line_length=150_000
)
WINDOWS_TABLE = TableLimits(
    rows=MAXIMUM_ROWS, columns=MAXIMUM_WINDOW_GRID, line_length=600_000, cells=MAXIMUM_WINDOW_WEIGHTS
)

# Of many curves uploaded together: a zip archive, or a table with a column for each.
MAXIMUM_BATCH_CURVES = 500
MAXIMUM_BATCH_BYTES = 50 * 1024 * 1024  # unpacked
MAXIMUM_BATCH_POINTS = 4_000_000
# Folders and hidden files, which are passed over, may stand beside the curves.
MAXIMUM_ARCHIVE_ENTRIES = 5000
MAXIMUM_SOURCE_LENGTH = 300
BATCH_TABLE = TableLimits(
    rows=MAXIMUM_ROWS, columns=MAXIMUM_BATCH_CURVES + 1, line_length=40_000, cells=MAXIMUM_BATCH_POINTS
)
