"""The equations of a domain on each level, made when they are first asked for."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

from core.flow.quality import check_memory, check_size, needed_memory_mb

if TYPE_CHECKING:
    from collections.abc import Callable

    from skfem import MeshTri2

    from core.flow.domain import FlowDomain
    from core.flow.problem import FlowProblem
    from core.flow.quality import Level


@dataclass(frozen=True, slots=True, eq=False)
class Equations:
    """One level, ready to be solved.

    Attributes
    ----------
    problems : dict of FlowProblem
        By direction.
    memory_mb : float
        Estimated need of solving one direction [MB].
    """

    problems: dict[str, FlowProblem]
    memory_mb: float


class Levels:
    """All levels of one domain.

    Parameters
    ----------
    domain : FlowDomain
    memory_limit_mb : float
        Most memory to use [MB].
    """

    def __init__(self, domain: FlowDomain, memory_limit_mb: float) -> None:
        self.domain, self.memory_limit_mb = domain, memory_limit_mb
        self._made: dict[Level, Equations] = {}
        self._meshes: dict[float, MeshTri2] = {}

    def at(self, level: Level, tell: Callable[[str], None] = lambda text: None) -> Equations:
        """Return the equations of a level.

        Raises
        ------
        SolveError
            If the domain cannot be meshed or the level does not fit the memory.
        """
        if level not in self._made:
            check_size(self.domain, level, self.memory_limit_mb)
            tell(f"meshing, triangles of {level.size:.2g} widths")
            self._made[level] = self._equations(level)
        return self._made[level]

    def _equations(self, level: Level) -> Equations:
        from core.flow.assembly import Assembler
        from core.flow.mesh import channel_mesh, plan_for_depth
        from core.flow.modes import depth_tensors
        from core.flow.problem import both_directions

        depth = self.domain.depth_to_width
        if level.size not in self._meshes:
            self._meshes[level.size] = channel_mesh(self.domain, plan_for_depth(level.size, depth))
        assembler = Assembler(self._meshes[level.size], depth_tensors(level.modes, depth))
        problems = both_directions(assembler)
        memory = needed_memory_mb(problems["forward"].fill, assembler.layout.size)
        check_memory(memory, self.domain.stages, self.memory_limit_mb)
        return Equations(problems, memory)
