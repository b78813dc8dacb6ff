"""A sweep on a cluster: the same results; what cannot be used is told in one message."""

from __future__ import annotations

import datetime
import os
import signal
import subprocess
import sys
import time
from collections.abc import Iterator
from pathlib import Path

import pytest

pytest.importorskip("distributed")

from driftwell import open_run
from driftwell.cli.main import main
from driftwell.study import cluster as cluster_module
from driftwell.study.catalogue import Catalogue
from tests.cli.small_runs import LONG, started
from tests.study.small_cluster import SmallCluster, cluster
from tests.study.swept import PATIENCE, study, waited_for

Printed = pytest.CaptureFixture[str]


@pytest.fixture(scope="module")
def compiled(tmp_path_factory: pytest.TempPathFactory) -> dict[str, tuple[str, tuple[object, ...]]]:
    """What a sweep without a cluster gives; the workers need not compile side by side."""
    folder = tmp_path_factory.mktemp("compiled")
    assert 0 == main(["sweep", str(study(folder)), "-o", str(folder / "s"), "--no-pictures"])
    return ended(folder / "s")


@pytest.fixture(scope="module")
def running(compiled: object) -> Iterator[SmallCluster]:
    with cluster() as made:
        yield made


def ended(folder: Path) -> dict[str, tuple[str, tuple[object, ...]]]:
    """How the runs ended, and their answers."""
    with Catalogue(folder / "catalogue.sqlite", read_only=True) as catalogue:
        return {row.digest: (row.word, tuple(row.answers)) for row in catalogue.rows()}


def on_cluster(path: Path, folder: Path, address: str, *more: str | Path) -> list[str]:
    """The arguments of the command."""
    given = ("sweep", path, "-o", folder, "--no-pictures", "--on", "dask", "--scheduler", address)
    return [str(each) for each in (*given, *more)]


def refused(capsys: Printed, *arguments: str | Path) -> str:
    """The message of a command that cannot be carried out."""
    assert 2 == main(["sweep", *map(str, arguments)])
    printed = capsys.readouterr()
    assert "" == printed.out
    assert "Traceback" not in printed.err
    return printed.err.partition("\n")[2]  # below the study's title


def test_a_cluster_gives_what_this_machine_gives(
    tmp_path: Path, running: SmallCluster, compiled: object, monkeypatch: pytest.MonkeyPatch
) -> None:
    study(tmp_path)
    monkeypatch.chdir(tmp_path)  # names are not absolute, and the workers are elsewhere
    process = started(*on_cluster(Path("ions.toml"), Path("s"), running.address))
    out, err = process.communicate(timeout=PATIENCE)
    assert 0 == process.returncode, err
    assert f"2 runs side by side at {running.address}, on 1 thread each" in err
    assert "3 runs: 3 computed now" in out
    assert compiled == ended(tmp_path / "s")


def test_a_stop_seals_the_runs_on_the_cluster_and_the_next_goes_on(
    tmp_path: Path, running: SmallCluster
) -> None:
    path, folder = study(tmp_path, "2, 4, 8", settings=LONG), tmp_path / "s"
    process = started(*on_cluster(path, folder, running.address))
    waited_for(process, 2, folder, "runs/*/progress.json")
    time.sleep(1.0)
    process.send_signal(signal.SIGTERM)
    out, err = process.communicate(timeout=60.0)
    assert 4 == process.returncode, out + err
    records = [open_run(each) for each in (folder / "runs").iterdir()]
    assert ["stopped"] * 2 == [record.outcome.word for record in records]


def test_a_driver_that_is_killed_leaves_no_run_going(tmp_path: Path, running: SmallCluster) -> None:
    path, folder = study(tmp_path, "2, 4", settings=LONG), tmp_path / "s"
    process = started(*on_cluster(path, folder, running.address))
    waited_for(process, 2, folder, "runs/*/progress.json")
    process.kill()
    process.communicate()
    end = time.monotonic() + 60.0
    while list(folder.glob("runs/*/in-use")):
        assert time.monotonic() < end
        time.sleep(0.1)
    words = [open_run(each).outcome.word for each in (folder / "runs").iterdir()]
    assert ["stopped"] * 2 == words


def test_a_scheduler_that_goes_away_ends_the_sweep_and_the_same_command_goes_on(
    tmp_path: Path, compiled: object
) -> None:
    settings = ("duration=40 ms", "stepping.step=20 ns", "record.every=1 ms")
    path, folder = study(tmp_path, "2, 4, 6, 8", settings=settings), tmp_path / "s"
    with cluster() as first:
        process = started(*on_cluster(path, folder, first.address))
        waited_for(process, 1, folder, "runs/*/progress.json")
        first.kill_scheduler()
        out, err = process.communicate(timeout=60.0)
        assert (8, "") == (process.returncode, out)
        assert f"{first.address}: the scheduler is gone" in err
        assert "give the same command" in err
        assert "Traceback" not in err
    with cluster() as second:
        process = started(*on_cluster(path, folder, second.address))
        out, err = process.communicate(timeout=PATIENCE)
        assert 0 == process.returncode, out + err
    assert ["finished"] * 4 == [word for word, _ in ended(folder).values()]
    assert all([] == open_run(each).damage() for each in (folder / "runs").iterdir())


def test_certificates_let_a_sweep_in_and_keep_others_out(
    tmp_path: Path, compiled: object, capsys: Printed, monkeypatch: pytest.MonkeyPatch
) -> None:
    certificate, key = made_certificate(tmp_path)
    files = {"tls_ca_file": certificate, "tls_scheduler_cert": certificate}
    files |= {"tls_scheduler_key": key, "tls_worker_cert": certificate, "tls_worker_key": key}
    files |= {"tls_client_cert": certificate, "tls_client_key": key}
    path, folder = study(tmp_path, "2, 4"), tmp_path / "s"
    with cluster(1, **{name: str(file) for name, file in files.items()}) as made:
        assert made.address.startswith("tls://")
        tls = ("--tls-ca", certificate, "--tls-cert", certificate, "--tls-key", key)
        process = started(*on_cluster(path, folder, made.address, *tls))
        out, err = process.communicate(timeout=PATIENCE)
        assert 0 == process.returncode, out + err
        assert "2 runs: 2 computed now" in out
        monkeypatch.setattr(cluster_module, "PATIENCE", 2.0)
        bare = made.address.removeprefix("tls://")
        (tmp_path / "b").mkdir()
        arguments = on_cluster(path, tmp_path / "b" / "s", bare)[1:]
        assert "no Dask scheduler answers there" in refused(capsys, *arguments)
        other, its_key = made_certificate(tmp_path / "b")
        tls = ("--tls-ca", certificate, "--tls-cert", other, "--tls-key", its_key)
        assert "no Dask scheduler answers there" in refused(capsys, *arguments, *tls)
        assert not (tmp_path / "b" / "s").exists()


def made_certificate(folder: Path) -> tuple[Path, Path]:
    """A certificate that is its own authority, and its key."""
    x509 = pytest.importorskip("cryptography.x509")
    from cryptography.hazmat.primitives import hashes, serialization
    from cryptography.hazmat.primitives.asymmetric import ec

    key = ec.generate_private_key(ec.SECP256R1())
    name = x509.Name([x509.NameAttribute(x509.NameOID.COMMON_NAME, "a cluster")])
    now = datetime.datetime.now(datetime.UTC)
    made = (
        x509.CertificateBuilder()
        .subject_name(name)
        .issuer_name(name)
        .public_key(key.public_key())
        .serial_number(x509.random_serial_number())
        .not_valid_before(now - datetime.timedelta(days=1))
        .not_valid_after(now + datetime.timedelta(days=1))
        .add_extension(x509.BasicConstraints(ca=True, path_length=None), critical=True)
        .sign(key, hashes.SHA256())
    )
    (folder / "its.crt").write_bytes(made.public_bytes(serialization.Encoding.PEM))
    (folder / "its.key").write_bytes(
        key.private_bytes(
            serialization.Encoding.PEM,
            serialization.PrivateFormat.PKCS8,
            serialization.NoEncryption(),
        )
    )
    return folder / "its.crt", folder / "its.key"


@pytest.mark.parametrize(
    ("options", "message"),
    [
        (("--on", "dask"), "--on dask: needs --scheduler ADDRESS"),
        (("--scheduler", "tcp://192.0.2.1:8786"), "--scheduler: is for a cluster only"),
        (("--tls-key", "a.key"), "--tls-key: is for a cluster only"),
        (("--on", "dask", "--scheduler", "somewhere"), "'somewhere': is no address"),
        (("--on", "dask", "--scheduler", "tcp://host:99999"), "is no address"),
        (("--on", "dask", "--scheduler", "http://host:8786"), "is no address"),
        (("--on", "dask", "--scheduler", "tls://host:8786"), "needs --tls-ca, --tls-cert and"),
        (
            ("--on", "dask", "--scheduler", "h:1", "--tls-ca", "a.crt"),
            "TLS needs three files; --tls-cert and --tls-key is not given",
        ),
    ],
)
def test_a_command_line_that_is_not_clear_is_refused(
    tmp_path: Path, capsys: Printed, options: tuple[str, ...], message: str
) -> None:
    assert message in refused(capsys, study(tmp_path), "-o", tmp_path / "s", *options)
    assert not (tmp_path / "s").exists()


def test_files_that_are_missing_or_no_certificates_are_named(
    tmp_path: Path, capsys: Printed
) -> None:
    path = study(tmp_path)
    tls = [word for each in ("ca", "cert", "key") for word in (f"--tls-{each}", tmp_path / each)]
    arguments = on_cluster(path, tmp_path / "s", "h:8786")[1:]
    (tmp_path / "ca").write_text("no certificate")
    message = refused(capsys, *arguments, *tls)
    assert f"--tls-cert {tmp_path / 'cert'}: cannot be read (No such file" in message
    (tmp_path / "cert").write_text("no certificate")
    (tmp_path / "key").write_text("no key")
    message = refused(capsys, *arguments, *tls)
    assert "cannot be used together" in message
    tcp = on_cluster(path, tmp_path / "s", "tcp://h:8786")[1:]
    made_certificate(tmp_path)
    assert "is not encrypted" in refused(capsys, *tcp, *tls)


def test_a_scheduler_that_is_not_there_is_told(
    tmp_path: Path, capsys: Printed, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr(cluster_module, "PATIENCE", 0.5)
    arguments = on_cluster(study(tmp_path), tmp_path / "s", "127.0.0.1:1")[1:]
    message = refused(capsys, *arguments)
    assert message.startswith("tcp://127.0.0.1:1: no Dask scheduler answers there")
    assert not (tmp_path / "s").exists()


def test_a_folder_the_workers_do_not_see_is_told(tmp_path: Path, running: SmallCluster) -> None:
    found = cluster_module.Cluster(running.address)
    try:
        found.fits(tmp_path)
        with pytest.raises(cluster_module.EngineError, match="needs to be on a disk that all"):
            found.fits(tmp_path / "elsewhere")
    finally:
        found.close()


def test_without_a_cluster_its_library_is_not_loaded_and_may_be_missing(tmp_path: Path) -> None:
    (tmp_path / "away").mkdir()
    (tmp_path / "away" / "distributed.py").write_text("raise ImportError('not installed')")
    environment = {
        **os.environ,
        "PYTHONPATH": os.pathsep.join([str(tmp_path / "away"), *filter(None, sys.path)]),
    }
    path, folder = study(tmp_path, "2"), tmp_path / "s"
    command = [sys.executable, "-m", "driftwell", *on_cluster(path, folder, "tcp://h:8786")]
    asked = subprocess.run(command, env=environment, capture_output=True, text=True, check=False)
    assert 2 == asked.returncode
    assert "How many ions\n--on dask needs the library distributed, which is not installed" in (
        asked.stderr
    )
    assert asked.stderr.endswith("pip install 'driftwell[cluster]'\n")
    command = command[: command.index("--on")]
    here = subprocess.run(command, env=environment, capture_output=True, text=True, check=False)
    assert 0 == here.returncode, here.stderr
