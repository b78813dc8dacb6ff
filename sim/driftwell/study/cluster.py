"""A cluster of Dask workers: the engine of sweeps that one machine is too small for.

Nobody imports this who does not ask for a cluster; it raises EngineError where the library is
missing.
"""

from __future__ import annotations

import re
from collections.abc import Sequence
from contextlib import suppress
from dataclasses import dataclass
from pathlib import Path

from driftwell._version import __version__
from driftwell.study.cluster_engine import ClusterEngine
from driftwell.study.cluster_task import fitness
from driftwell.study.cores import Load, Sharing
from driftwell.study.engine import EngineError

try:
    from distributed import Client, Security
except ImportError as fault:
    raise EngineError(
        "--on dask needs the library distributed, which is not installed here. Install it with: "
        "pip install 'driftwell[cluster]'"
    ) from fault

PATIENCE = 10.0
"""s, for the scheduler to answer at first."""
_ADDRESS = re.compile(
    r"(?:(?P<scheme>tcp|tls)://)?(?:\[[0-9a-fA-F:.]+\]|[^\s:/\[\]]+):(?P<port>\d+)"
)
_MOST_PORT = 65535


@dataclass(frozen=True, slots=True)
class Certificates:
    """Files in PEM form: of the authority, of this side, and its key."""

    authority: Path
    certificate: Path
    key: Path


class Cluster:
    """What stands behind a scheduler's address.

    Raises EngineError where nothing answers there, or the certificates cannot be used.

    patience : s, for it to answer
    """

    def __init__(
        self, address: str, certificates: Certificates | None = None, patience: float | None = None
    ) -> None:
        self._address = _whole_address(address, certificates is not None)
        security = Security() if certificates is None else _security(certificates)
        wait = PATIENCE if patience is None else patience
        try:
            self._client = Client(
                self._address, security=security, timeout=wait, set_as_default=False
            )
        except Exception as fault:
            raise EngineError(
                f"{self._address}: no Dask scheduler answers there as it should within {wait:g} s "
                f"({_first_words(fault)}). Needs the address that the scheduler printed when it "
                "was started, and its certificates where it uses TLS."
            ) from fault

    def fits(self, folder: Path) -> None:
        """See that all workers that are there could compute a sweep in this folder.

        Raises EngineError where one could not.
        """
        try:
            found = self._client.run(
                fitness, __version__, str(folder.absolute()), on_error="return"
            )
        except Exception as fault:
            raise EngineError(
                f"{self._address}: its workers could not be asked ({_first_words(fault)})."
            ) from fault
        for worker, said in found.items():
            if isinstance(said, ImportError):
                raise EngineError(
                    f"The worker {worker} cannot load driftwell ({said}); every worker needs "
                    f"driftwell {__version__} in its own Python."
                ) from said
            if isinstance(said, Exception):
                raise EngineError(
                    f"The worker {worker} cannot be used ({_first_words(said)})."
                ) from said
            if said:
                raise EngineError(said)

    def sharing(self, load: Load, workers: int | None, threads: int | None) -> Sharing:
        """As many runs side by side as the cluster has threads; one thread each, or as asked.

        Raises EngineError where the cluster does not say.
        """
        try:
            there = sum(self._client.nthreads().values())
        except Exception as fault:
            raise EngineError(
                f"{self._address}: its workers could not be counted ({_first_words(fault)})."
            ) from fault
        each = threads or 1
        side = there if workers is None else min(there, workers)
        if not there:
            told = f"no worker at {self._address} yet; runs begin as soon as one comes"
        else:
            runs = "one run at a time" if side == 1 else f"{side} runs side by side"
            told = f"{runs} at {self._address}, on {each} thread{'s' * (each != 1)} each"
        return Sharing(max(1, side), each, told)

    def engine(self, workers: int | None) -> ClusterEngine:
        """Carries out runs there, at most `workers` at a time; closing it ends the connection."""
        return ClusterEngine(self._client, self._address, workers)

    def close(self) -> None:
        """End the connection; nothing happens where it has ended."""
        with suppress(Exception):
            self._client.close(timeout=1.0)


def _whole_address(text: str, encrypted: bool) -> str:
    """The address with its scheme."""
    found = _ADDRESS.fullmatch(text)
    if found is None or not 1 <= int(found["port"]) <= _MOST_PORT:
        raise EngineError(
            f"--scheduler {text[:80]!r}: is no address of a scheduler; needs HOST:PORT, such as "
            "tcp://192.0.2.1:8786, or tls://192.0.2.1:8786 with certificates."
        )
    if found["scheme"] is None:
        return f"{'tls' if encrypted else 'tcp'}://{text}"
    if (found["scheme"] == "tls") != encrypted:
        what = (
            "needs --tls-ca, --tls-cert and --tls-key"
            if not encrypted
            else "is not encrypted; with certificates it needs to begin with tls://"
        )
        raise EngineError(f"--scheduler {text[:80]}: {what}.")
    return text


def _security(files: Certificates) -> Security:
    named: Sequence[tuple[str, Path]] = (
        ("--tls-ca", files.authority),
        ("--tls-cert", files.certificate),
        ("--tls-key", files.key),
    )
    for option, path in named:
        try:
            path.read_bytes()
        except (OSError, ValueError) as fault:
            why = getattr(fault, "strerror", None) or fault
            raise EngineError(
                f"{option} {path}: cannot be read ({why}); needs a file in PEM form."
            ) from fault
    security = Security(
        require_encryption=True,
        tls_ca_file=str(files.authority),
        tls_client_cert=str(files.certificate),
        tls_client_key=str(files.key),
    )
    try:
        security.get_connection_args("client")
    except (OSError, ValueError) as fault:  # errors of TLS are of the first kind
        raise EngineError(
            f"The certificates {files.authority}, {files.certificate} and the key {files.key} "
            f"cannot be used together ({fault}); needs files in PEM form, and the certificate's "
            "own key."
        ) from fault
    return security


def _first_words(fault: BaseException) -> str:
    """One line of what went wrong."""
    text = str(fault).strip()
    return text.splitlines()[0][:200] if text else type(fault).__name__
