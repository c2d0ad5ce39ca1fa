"""What the add-in starts: one Python process that answers every workbook of one Excel."""

from __future__ import annotations

import logging
import logging.handlers
import os
import tempfile
from pathlib import Path
from typing import Any

_BYTES = 1_000_000


def log_file() -> Path:
    """Return where faults are written, with their tracebacks."""
    return Path(os.environ.get("LOCALAPPDATA") or tempfile.gettempdir()) / "xlaxial" / "excel.log"


def run(clsid: str) -> None:
    """Answer Excel until it ends; a fault at the start is in the log.

    Parameters
    ----------
    clsid : str
        Identifier under which xlwings' library in Excel waits for this process.
    """
    log = logging.getLogger("xlaxial")
    try:
        log_file().parent.mkdir(parents=True, exist_ok=True)
        handler = logging.handlers.RotatingFileHandler(log_file(), maxBytes=_BYTES, backupCount=1, encoding="utf-8")
        handler.setFormatter(logging.Formatter("%(asctime)s %(levelname)s %(message)s"))
        log.addHandler(handler)
    except OSError:
        pass  # a folder that cannot be written costs the log, not the functions
    try:
        import xlwings

        import xlaxial.hosts.excel.udfs  # noqa: F401 - loaded before the first call waits for it

        serve: Any = xlwings.serve  # elsewhere than on Windows it is another function
        serve(clsid)
    except Exception:
        log.exception("the process for Excel could not start")
        raise
