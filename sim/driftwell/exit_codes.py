"""With which exit code a command ends, and what each says.

Scripts branch on these numbers: none ever changes its meaning.
"""

from __future__ import annotations

FINISHED = 0
DEFECT = 1
UNUSABLE = 2
ALL_LOST = 3
STOPPED = 4
NOT_CONTINUED = 5
NOT_RECORDED = 6
SOME_FAILED = 7
SCHEDULER_GONE = 8
NO_CROSSING = 9
SEVERAL_CROSSINGS = 10
TOO_NOISY = 11
NOT_CONVERGED = 12
INTERRUPTED = 130

MEANINGS = {
    FINISHED: "finished",
    DEFECT: "a defect of driftwell: please report it",
    UNUSABLE: "the scenario, the folder or the command line cannot be used",
    ALL_LOST: "every charge was lost",
    STOPPED: "stopped, on request or by --stop-after; the same command goes on",
    NOT_CONTINUED: "the motion could not be continued",
    NOT_RECORDED: "the disk refused the record; make space, and the same command goes on",
    SOME_FAILED: "some of the runs failed; the summary says which and why",
    SCHEDULER_GONE: "the cluster's scheduler is gone; the same command goes on",
    NO_CROSSING: "no crossing",
    SEVERAL_CROSSINGS: "several crossings",
    TOO_NOISY: "noise too large to tell, or too few runs allowed",
    NOT_CONVERGED: "some answer has not converged within the tolerance asked for",
    INTERRUPTED: "interrupted at once",
}
"""What each says, of whichever command; a command may say it more closely."""
