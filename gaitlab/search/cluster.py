"""The same evaluations on a dask.distributed cluster, through the executor that its client offers."""

from __future__ import annotations

from concurrent.futures import CancelledError, Executor
from dataclasses import dataclass
from pathlib import Path
from typing import Any

from gaitlab.errors import InputError, MissingExtraError, must
from gaitlab.search.evaluate import Evaluate
from gaitlab.search.identity import code_version
from gaitlab.search.workers import IN_FLIGHT_PER_WORKER, ExecutorWorkers

CONNECT_S = 10.0  # how long a scheduler may take to answer; chosen by us
GONE = ("closing", "closed")  # states of a client that has given its scheduler up
WORKERS_S = 10.0  # how long to wait for the first worker; chosen by us


@dataclass(frozen=True)
class Certificates:
    """PEM files for an encrypted cluster: the authority's certificate, ours, and our key."""

    authority: Path
    certificate: Path
    key: Path


def cluster_workers(evaluate: Evaluate, address: str, certificates: Certificates | None = None) -> ExecutorWorkers:
    """Workers on the cluster whose scheduler is at `address` (such as tcp://host:8786, or tls:// with certificates).

    Raises MissingExtraError without the extra `cluster`; InputError when nobody answers, when no worker is there, and
    when the cluster's workers run other code of the models than this process.
    """
    client = _client(address, certificates)
    try:
        number = _workers_there(client, address)
        _refuse_other_code(client)
    except BaseException:
        client.close()
        raise
    return ExecutorWorkers(
        evaluate=evaluate,
        start=lambda: client.get_executor(pure=False),
        in_flight=IN_FLIGHT_PER_WORKER * number,
        lost=_losses(),
        stop=lambda executor: _stopped(executor, client),
        reachable=lambda: client.status not in GONE,
    )


def _client(address: str, certificates: Certificates | None) -> Any:
    try:
        import distributed
    except ImportError as error:
        raise MissingExtraError("--cluster needs the extra cluster: pip install 'gaitlab[cluster]'") from error
    security = None
    if certificates is not None:
        security = distributed.Security(  # type: ignore[no-untyped-call]
            tls_ca_file=str(certificates.authority),
            tls_client_cert=str(certificates.certificate),
            tls_client_key=str(certificates.key),
            require_encryption=True,
        )
    try:
        return distributed.Client(  # type: ignore[no-untyped-call]
            address, timeout=CONNECT_S, security=security, set_as_default=False
        )
    except (OSError, ValueError, TypeError, RuntimeError) as error:
        why = (str(error).splitlines() or [type(error).__name__])[0]
        rule = f"the address of a scheduler that answers within {CONNECT_S:g} s"
        fix = f"start one with `dask scheduler` and copy the address it prints ({why})"
        raise InputError(must("--cluster", rule, address, fix)) from error


def _workers_there(client: Any, address: str) -> int:
    try:
        client.wait_for_workers(1, timeout=WORKERS_S)
    except TimeoutError as error:
        rule = f"a cluster with at least one worker (waited {WORKERS_S:g} s)"
        raise InputError(must("--cluster", rule, address, "start some with `dask worker ADDRESS`")) from error
    return max(1, sum(int(threads) for threads in client.nthreads().values()))


def _refuse_other_code(client: Any) -> None:
    ours = code_version()
    others = {place: theirs for place, theirs in _versions(client).items() if theirs != ours}
    if others:
        worker, theirs = next(iter(others.items()))
        rule = f"of workers with this code of the models (version {ours})"
        raise InputError(
            must("--cluster", rule, f"{theirs} on {worker}", "install the same gaitlab and libraries there")
        )


def _versions(client: Any) -> dict[str, str]:
    """Versions on the scheduler and on every worker: each of them unpacks the jobs, so each needs gaitlab."""
    try:
        return {"the scheduler": client.run_on_scheduler(code_version), **client.run(code_version)}
    except Exception as error:  # whatever the other side raised, most often that there is no module gaitlab
        why = (str(error).splitlines() or [type(error).__name__])[0]
        rule = "a cluster with gaitlab installed on its scheduler and on every worker"
        raise InputError(must("--cluster", rule, why, "install the same gaitlab and libraries there")) from error


def _losses() -> tuple[type[BaseException], ...]:
    """A walk whose worker died is tried again by the scheduler itself; these say that it gave up."""
    from distributed.client import FutureCancelledError
    from distributed.comm.core import CommClosedError
    from distributed.scheduler import KilledWorker

    return (KilledWorker, FutureCancelledError, CommClosedError, CancelledError)


def _stopped(executor: Executor, client: Any) -> None:
    """Cancels what is still to be done, and closes; with the scheduler gone there is nothing to cancel and nobody to tell."""
    try:
        executor.shutdown(wait=False)
    except Exception:
        if client.status not in GONE:
            raise
    client.close()
