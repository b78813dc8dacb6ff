"""Where a sweep's runs are computed: here, or by a cluster, as the command line says."""

from __future__ import annotations

import argparse
import logging
from dataclasses import dataclass
from pathlib import Path
from typing import TYPE_CHECKING

from driftwell.study.engine import EngineError

if TYPE_CHECKING:
    from driftwell.study.cluster import Cluster

_ITS_LOGS = ("distributed", "tornado", "bokeh")


@dataclass(frozen=True, slots=True)
class Place:
    """What the command line says of it; None where it says nothing."""

    on: str | None = None
    scheduler: str | None = None
    authority: str | None = None
    certificate: str | None = None
    key: str | None = None

    def cluster(self) -> Cluster | None:
        """The cluster, connected; None where all is computed here.

        Raises EngineError where that is not clear, or the cluster cannot be used.
        """
        files = {
            "--tls-ca": self.authority,
            "--tls-cert": self.certificate,
            "--tls-key": self.key,
        }
        if self.on is None:
            given = {"--scheduler": self.scheduler, **files}
            named = [option for option, value in given.items() if value is not None]
            if named:
                raise EngineError(f"{named[0]}: is for a cluster only; it needs --on dask as well.")
            return None
        if self.scheduler is None:
            raise EngineError(
                "--on dask: needs --scheduler ADDRESS, which the scheduler prints when it is "
                "started, such as tcp://192.0.2.1:8786."
            )
        missing = [option for option, value in files.items() if value is None]
        if missing and len(missing) < len(files):
            raise EngineError(f"TLS needs three files; {' and '.join(missing)} is not given.")
        return self._connected(self.scheduler)

    def _connected(self, scheduler: str) -> Cluster:
        from driftwell.study.cluster import Certificates, Cluster

        for name in list(logging.root.manager.loggerDict):
            if name.partition(".")[0] in _ITS_LOGS:  # what matters is told by us
                logging.getLogger(name).setLevel(logging.CRITICAL + 1)
        if self.authority is None or self.certificate is None or self.key is None:
            return Cluster(scheduler)
        files = Certificates(Path(self.authority), Path(self.certificate), Path(self.key))
        return Cluster(scheduler, files)


def place_of(asked: argparse.Namespace) -> Place:
    """The place that the options of :func:`driftwell.cli.options.shared.add_cluster` name."""
    return Place(asked.on, asked.scheduler, asked.tls_ca, asked.tls_cert, asked.tls_key)
