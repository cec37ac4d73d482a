"""A fault of the program itself: one line for the user, the details in a file to send."""

import platform
import sys
import tempfile
import traceback

import lumentrace


def keep_report(error: BaseException) -> str:
    """Write versions, command and traceback to the temporary folder; return the line to print."""
    name = type(error).__name__
    report = "\n".join(
        [
            f"lumentrace {lumentrace.__version__}, Python {sys.version.split()[0]}, "
            f"{platform.platform()}",
            "command: " + " ".join(sys.argv),
            "".join(traceback.format_exception(error)),
        ]
    )
    try:
        with tempfile.NamedTemporaryFile(
            "w", prefix="lumentrace-fault-", suffix=".log", delete=False, encoding="utf-8"
        ) as log:
            log.write(report)
    except OSError:
        return f"A fault of lumentrace itself ({name}); no place to write its details"
    return f"A fault of lumentrace itself ({name}); the details are in {log.name}"
