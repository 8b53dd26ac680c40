"""How much checking one PDF may cost, and how a process holds itself to it."""

from __future__ import annotations

from dataclasses import dataclass

MEGABYTE = 1 << 20


@dataclass(frozen=True, slots=True, kw_only=True)
class VerifyLimits:
    """Bounds of checking one PDF."""

    memory_bytes: int = 1536 * MEGABYTE
    """Address space of the checking process, bytes."""
    cpu_s: int = 120
    """Processor time of the checking process, seconds."""
    wall_s: float = 300.0
    """Time that the caller waits, seconds."""


def apply_limits(memory_bytes: int, cpu_s: int) -> None:
    """Limit this process; where the system has no such limits the caller's waiting time remains.

    Only the soft limits are set: the reader child that this process starts sets its own.
    """
    try:
        import resource
    except ImportError:
        return
    for kind, wanted in ((resource.RLIMIT_AS, memory_bytes), (resource.RLIMIT_CPU, cpu_s)):
        hard = resource.getrlimit(kind)[1]
        soft = wanted if hard == resource.RLIM_INFINITY else min(wanted, hard)
        resource.setrlimit(kind, (soft, hard))
