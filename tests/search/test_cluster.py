"""The same search on a real scheduler with two real workers on loopback, one of which is killed half-way."""

from __future__ import annotations

import os
import signal
import subprocess
import sys
import time
from collections.abc import Iterator
from concurrent.futures import ThreadPoolExecutor
from contextlib import contextmanager
from pathlib import Path

import pytest
from search.fakes import by_hash, coarse_or_hash, slowly, task_of
from search.test_run import searched

from gaitlab.errors import InputError
from gaitlab.search import cluster
from gaitlab.search.cluster import Certificates, cluster_workers
from gaitlab.search.evaluate import Guarded
from gaitlab.search.strategies.choice import StrategyChoice
from gaitlab.search.workers import InProcess

TESTS = Path(__file__).parents[1]


@contextmanager
def processes() -> Iterator[list[subprocess.Popen[bytes]]]:
    """Processes to be ended, by their own ids, whatever happens."""
    running: list[subprocess.Popen[bytes]] = []
    try:
        yield running
    finally:
        for process in reversed(running):
            process.terminate()
        for process in running:
            try:
                process.wait(10)
            except subprocess.TimeoutExpired:
                process.kill()
                process.wait()


def dask(folder: Path, *words: str) -> subprocess.Popen[bytes]:
    environment = {**os.environ, "PYTHONPATH": os.pathsep.join([str(TESTS), str(TESTS.parent)])}
    log = (folder / f"{words[0]}.log").open("ab")
    return subprocess.Popen([sys.executable, "-m", "dask", *words], env=environment, cwd=folder, stdout=log, stderr=log)


def address_in(file: Path) -> str:
    import json

    end = time.monotonic() + 60
    while time.monotonic() < end:
        if file.is_file() and file.read_text():
            return str(json.loads(file.read_text())["address"])
        time.sleep(0.1)
    raise AssertionError("the scheduler did not come up")


@contextmanager
def running_cluster(
    folder: Path, *tls: str, security: object = None
) -> Iterator[tuple[str, list[subprocess.Popen[bytes]]]]:
    """A scheduler and two workers of one thread each; gives the address and the worker processes."""
    scheduler_file = folder / "scheduler.json"
    with processes() as running:
        quiet = ("--no-dashboard", *tls)
        running.append(
            dask(
                folder,
                "scheduler",
                "--host",
                "127.0.0.1",
                "--port",
                "0",
                *quiet,
                "--scheduler-file",
                str(scheduler_file),
            )
        )
        address = address_in(scheduler_file)
        for _ in range(2):
            options = ("--nthreads", "1", "--no-nanny", "--no-dashboard", "--local-directory", str(folder), *tls)
            running.append(dask(folder, "worker", address, *options))
        wait_for_workers(address, 2, security)
        yield address, running[1:]


def wait_for_workers(address: str, number: int, security: object) -> None:
    import distributed

    client = distributed.Client(address, timeout=30, set_as_default=False, security=security)
    try:
        client.wait_for_workers(number, timeout=60)
    finally:
        client.close()


@pytest.mark.cluster
def test_cluster_gives_the_same_bytes_though_a_worker_is_killed(tmp_path: Path) -> None:
    task = task_of(6, 5, inlets_per_output_max=2)
    whole = searched(tmp_path / "whole", InProcess(by_hash), task=task)
    with running_cluster(tmp_path) as (address, workers):
        remote = cluster_workers(slowly, address)
        walks = []

        def killing(jobs):  # type: ignore[no-untyped-def]
            for job, done in evaluated(jobs):
                walks.append(job)
                if len(walks) == 60:
                    os.kill(workers[0].pid, signal.SIGKILL)
                yield job, done

        evaluated = remote.evaluated
        remote.evaluated = killing  # type: ignore[method-assign]
        assert searched(tmp_path / "cluster", remote, task=task) == whole
        assert workers[0].wait(10) == -signal.SIGKILL
        assert workers[1].poll() is None


@pytest.mark.cluster
def test_coarse_walks_of_a_cluster_are_those_of_this_machine(tmp_path: Path) -> None:
    """Real coarse walks in bundles, and made-up settled ones."""
    task, choice = task_of(), StrategyChoice("screen", 6, 1)
    here = searched(tmp_path / "here", InProcess(Guarded(coarse_or_hash)), task=task, choice=choice)
    with running_cluster(tmp_path) as (address, _):
        remote = cluster_workers(Guarded(coarse_or_hash), address)
        assert searched(tmp_path / "cluster", remote, task=task, choice=choice) == here
    assert here.count(b",coarse\n") > 10


@pytest.mark.cluster
def test_a_lost_scheduler_ends_the_search_with_what_is_known(tmp_path: Path) -> None:
    task = task_of(6, 5, inlets_per_output_max=2)
    whole = searched(tmp_path / "whole", InProcess(by_hash), task=task)
    with processes() as running:
        scheduler_file = tmp_path / "scheduler.json"
        words = ("--host", "127.0.0.1", "--port", "0", "--no-dashboard", "--scheduler-file", str(scheduler_file))
        running.append(dask(tmp_path, "scheduler", *words))
        address = address_in(scheduler_file)
        options = ("--nthreads", "1", "--no-nanny", "--no-dashboard", "--local-directory", str(tmp_path))
        running.append(dask(tmp_path, "worker", address, *options))
        remote = cluster_workers(slowly, address)
        evaluated, walks = remote.evaluated, []

        def losing(jobs):  # type: ignore[no-untyped-def]
            for job, done in evaluated(jobs):
                walks.append(job)
                if len(walks) == 40:
                    os.kill(running[0].pid, signal.SIGKILL)
                yield job, done

        remote.evaluated = losing  # type: ignore[method-assign]
        searched(tmp_path / "run", remote, task=task)
    known = len((tmp_path / "run" / "ranking.csv").read_text().splitlines()) - 1
    assert 40 <= known < 360
    assert searched(tmp_path / "run", InProcess(by_hash), task=task, resume=True) == whole


class GoneClient:
    """A client that has given its scheduler up while its executor was about to cancel what is left."""

    def __init__(self, status: str) -> None:
        self.status, self.ended = status, False

    def close(self) -> None:
        self.ended = True


class BrokenExecutor(ThreadPoolExecutor):
    def shutdown(self, wait: bool = True, *, cancel_futures: bool = False) -> None:
        super().shutdown(wait)
        raise RuntimeError("Client is closed. Can't send cancel-keys message.")


def test_ending_with_the_scheduler_gone_is_no_error_and_anything_else_is() -> None:
    gone, here = GoneClient("closed"), GoneClient("running")
    cluster._stopped(BrokenExecutor(1), gone)
    assert gone.ended
    with pytest.raises(RuntimeError):
        cluster._stopped(BrokenExecutor(1), here)


@pytest.mark.cluster
def test_workers_with_other_code_are_refused(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    with running_cluster(tmp_path) as (address, _):
        monkeypatch.setattr(cluster, "code_version", OtherCode())
        with pytest.raises(InputError, match="workers with this code"):
            cluster_workers(by_hash, address)


class WithoutGaitlab:
    """Stands for a client whose scheduler has no gaitlab: what dask raises then comes back to the caller."""

    def run_on_scheduler(self, function: object) -> str:
        raise ModuleNotFoundError("No module named 'gaitlab'")


def test_a_scheduler_without_gaitlab_is_told_before_any_walk() -> None:
    with pytest.raises(InputError, match="gaitlab installed on its scheduler and on every worker"):
        cluster._refuse_other_code(WithoutGaitlab())


def certificate(folder: Path) -> Certificates:
    """A certificate for loopback that vouches for itself, made for this test alone."""
    cert, key = folder / "cert.pem", folder / "key.pem"
    words = ["req", "-x509", "-newkey", "rsa:2048", "-nodes", "-days", "2", "-subj", "/CN=127.0.0.1"]
    words += ["-addext", "subjectAltName=IP:127.0.0.1", "-keyout", str(key), "-out", str(cert)]
    subprocess.run(["openssl", *words], check=True, capture_output=True)
    return Certificates(cert, cert, key)


@pytest.mark.cluster
def test_encrypted_cluster_gives_the_same_bytes_and_refuses_plain_callers(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    import distributed

    files = certificate(tmp_path)
    tls = ("--tls-ca-file", str(files.authority), "--tls-cert", str(files.certificate), "--tls-key", str(files.key))
    security = distributed.Security(
        tls_ca_file=str(files.authority), tls_client_cert=str(files.certificate), tls_client_key=str(files.key)
    )
    with running_cluster(tmp_path, "--protocol", "tls", *tls, security=security) as (address, _):
        assert address.startswith("tls://")
        here = searched(tmp_path / "here", InProcess(by_hash))
        assert searched(tmp_path / "there", cluster_workers(by_hash, address, files)) == here
        monkeypatch.setattr(cluster, "CONNECT_S", 3.0)
        with pytest.raises(InputError, match="--cluster must be the address"):
            cluster_workers(by_hash, address)


class OtherCode:
    """Tells one version here and, sent to a worker, another."""

    def __init__(self, version: str = "here") -> None:
        self._version = version

    def __call__(self) -> str:
        return self._version

    def __reduce__(self) -> tuple[type, tuple[str]]:
        return OtherCode, ("there",)


def test_an_address_nobody_answers_at_is_told(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(cluster, "CONNECT_S", 1.0)
    with pytest.raises(InputError, match=r"--cluster must be the address of a scheduler that answers within 1 s, got"):
        cluster_workers(by_hash, "tcp://127.0.0.1:9")


def test_an_address_that_is_none_is_told() -> None:
    with pytest.raises(InputError, match="--cluster must be the address"):
        cluster_workers(by_hash, "nonsense://x:y")
