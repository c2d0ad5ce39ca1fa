"""What stops a workbook from being taken up, in one line."""


class WorkbookError(Exception):
    """A file that cannot be read or written as a workbook; its text is one line for a person."""


class CannotEvaluate(Exception):  # noqa: N818 - a cell's state with its reason, not a fault of the program
    """A formula that stays at its stored value; its text says why."""
