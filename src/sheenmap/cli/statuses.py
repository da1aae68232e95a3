"""Exit statuses, and what a verdict comes to."""

DONE = 0
FAILED = 1
WRONG_SETTINGS = 2
NOT_DECIDABLE = 3
BROKEN = 4
INTERRUPTED = 130  # 128 + SIGINT, as shells count

OF_OUTCOME = {"passed": DONE, "failed": FAILED, "not decidable": NOT_DECIDABLE}
EPILOG = (
    "Exit status: 0 done and, where judged, passed; 1 judged and failed; 2 the command or the recipe is wrong; "
    "3 not decidable or not measured; 4 something broke."
)
