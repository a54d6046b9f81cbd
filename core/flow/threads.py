"""One thread for linear algebra: the matrices of a solve are too small to be shared out."""

from __future__ import annotations

from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from contextlib import AbstractContextManager


def one_thread() -> AbstractContextManager[object]:
    """Return a context in which linear algebra keeps to one thread; in force at once, ended on leaving.

    Measured on two processors: with a thread for each a solve takes ten times as long, most of it
    threads that wait for one another.
    """
    import scipy.linalg  # noqa: F401  brings a library of its own, which can be told only once it is there
    from threadpoolctl import threadpool_limits

    return threadpool_limits(limits=1, user_api="blas")
