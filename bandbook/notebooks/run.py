"""Execute a notebook in a kernel of its own."""

import asyncio
import contextlib
import math
import platform
import time
from collections.abc import Callable, Mapping
from dataclasses import dataclass, field
from typing import Any

from bandbook.exhibits.paper import Paper
from bandbook.notebooks.compose import compose
from bandbook.notebooks.endings import Ended, error_of
from bandbook.notebooks.harvest import Harvest, harvest
from bandbook.notebooks.kernels import Kernel, fresh_kernel, silent_log
from bandbook.notebooks.outputs import bounded, note_shortened, tidied


def local_runner(*, timeout: float) -> Callable[[Mapping[str, Any], str], Harvest]:
    """Return the runner that executes a case on this machine.

    Args:
        timeout: Longest time of one cell, s.
    """

    def run_one(parameters: Mapping[str, Any], key: str) -> Harvest:
        began, clock = time.time(), time.monotonic()
        notebook = run_notebook(compose(parameters, key), timeout=timeout)
        run = {"began": began, "seconds": time.monotonic() - clock, "host": platform.node()}
        return harvest(notebook, run=run)

    return run_one


def drawing_runner(*, timeout: float, paper: Paper) -> Callable[[Mapping[str, Any], str], Harvest]:
    """Return the runner that executes a case with its figures drawn for a paper.

    Args:
        timeout: Longest time of one cell, s.
        paper: What they are drawn for.
    """

    def run_one(parameters: Mapping[str, Any], key: str) -> Harvest:
        return harvest(run_notebook(compose(parameters, key, paper=paper.as_dict()), timeout=timeout))

    return run_one


def run_notebook(notebook: Any, *, timeout: float) -> Any:
    """Execute a notebook in a fresh kernel and return it, tidied.

    Args:
        notebook: As ``compose`` gives it; its outputs are filled.
        timeout: Longest time of one cell, s.

    Raises:
        WorkingsError: An author's code cell failed.
        PhysicsError: A question makes no sense for its model, or the numbers failed.
        AuthorError: A function of the workings built no model, or a study names what the model lacks.
        RunError: The run timed out, or the kernel died. Every error carries the number of its step, and the notebook
            as far as it ran.
    """
    with fresh_kernel() as kernel:
        execution = Execution(notebook, kernel, timeout)
        try:
            asyncio.run(execution.drive())
        except Exception as error:
            raise error_of(error, execution.ended()) from error
        return execution.tidied()


@dataclass
class Execution:
    """One execution: what runs, and how far it came.

    Attributes:
        notebook: Filled as it runs.
        kernel: Started and ended by ``drive``.
        timeout: Longest time of one cell, s.
        index: Number of the cell that runs, from 0.
        exit_code: How the kernel ended before it was told to.
        shortened: Streams that were cut: number of the cell, stream.
    """

    notebook: Any
    kernel: Kernel
    timeout: float
    index: int = 0
    exit_code: int | None = None
    shortened: set[tuple[int, str]] = field(default_factory=set)

    async def drive(self) -> None:
        """Start the kernel, execute cell by cell, and end it, whatever happens."""
        from nbclient.exceptions import DeadKernelError

        client = self._client()
        try:
            await client.async_start_new_kernel(**self.kernel.place)
            await client.async_start_new_kernel_client()
            for index, cell in enumerate(self.notebook.cells):
                self.index = index
                await client.async_execute_cell(cell, index, execution_count=client.code_cells_executed + 1)
        except DeadKernelError as error:
            task = asyncio.current_task()
            if task is not None and task.cancelling():  # nbclient takes an interrupted command for a dead kernel
                raise asyncio.CancelledError from error
            raise
        finally:
            self.exit_code = self.kernel.exit_code
            self.kernel.end()
            with contextlib.suppress(Exception):
                client.kc.stop_channels()
            await self.kernel.manager.cleanup_resources()

    def _client(self) -> Any:
        from nbclient import NotebookClient

        client = NotebookClient(
            self.notebook,
            km=self.kernel.manager,
            timeout=max(1, math.ceil(self.timeout)),
            startup_timeout=120,
            record_timing=False,
            raise_on_iopub_timeout=True,
            iopub_timeout=60,
            store_widget_state=False,
            on_cell_executed=_refuse_exit,
            log=silent_log(),
        )
        client.output = bounded(client.output, self.shortened)
        client.reset_execution_trackers()
        return client

    def tidied(self) -> Any:
        """Return the notebook as far as it ran, tidied."""
        note_shortened(self.notebook, self.shortened)
        self.shortened = set()
        return tidied(self.notebook, self.kernel.scratch)

    def ended(self) -> Ended:
        """Return how it ended."""
        return Ended(self.tidied(), self.index, self.timeout, self.exit_code)


def _refuse_exit(*, execute_reply: Any, **_: Any) -> None:
    """Notice ``quit()``, which a kernel answers as if all were well."""
    from nbclient.exceptions import DeadKernelError

    payload = execute_reply["content"].get("payload") or ()
    if any(entry.get("source") == "ask_exit" for entry in payload):
        raise DeadKernelError("a cell asked its kernel to end")
