"""The service under attack: what it holds in memory, and whether it still answers."""

import re
from pathlib import Path

from service import Service

ANSWER = {"e": [0, 1.2, 0], "b": [0, 0, 45000], "units": {"e": "mV/m", "b": "nT"}, "rotation": {"axis": [0, 0, 1], "angle": 0}}


class Victim(Service):
    """A service whose end must be clean, without a panic, within a bound of memory, and still able to answer."""

    def __init__(self, log, *flags, bound):
        super().__init__(log, *flags)
        self.bound = bound

    def _memory(self, field):
        status = Path(f"/proc/{self.process.pid}/status").read_text()
        return int(re.search(rf"{field}:\s+(\d+) kB", status)[1]) / 1024

    @property
    def peak(self):
        """The most memory it ever held, MiB (VmHWM of proc(5))."""
        return self._memory("VmHWM")

    def gauge(self, name):
        """The value of a metric."""
        text = self.get("/metrics").body.decode()
        return float(re.search(rf"^lodeframe_{re.escape(name)} (\S+)$", text, re.MULTILINE)[1])

    def __exit__(self, kind, *_):
        if kind is None:
            assert self.ask(ANSWER)["e"] == ANSWER["e"]
            assert self.gauge("panics_total") == 0
            assert self.peak < self.bound, f"{self.peak:.0f} MiB held, more than {self.bound} MiB"
        assert self.stop() == 0
        assert not re.search(r"level=error|panic", self.log.read_text())
