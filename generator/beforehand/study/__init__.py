"""What the commands and Python users call: run a spec, read a run, report, reprint, verify."""

from beforehand.study.reporting import report
from beforehand.study.reprinting import reprint
from beforehand.study.running import BOTH, Run, read_run, run
from beforehand.study.verifying import verify

__all__ = ["BOTH", "Run", "read_run", "report", "reprint", "run", "verify"]
