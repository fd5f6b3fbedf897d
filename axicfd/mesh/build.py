"""Case -> the family of nested grids of that case.

Every layer has one smooth radial map and every section one smooth axial map; level m of the family takes every 2^m-th
face of the finest one (m < 0 refines it), so coarse faces are fine faces and a cell has one material on every level.
The mesh chooses itself from the case; `[mesh]` keys override the choice.
"""

from collections.abc import Sequence
from dataclasses import dataclass, replace
from math import ceil, sqrt

import numpy as np

from axicfd.case.layout import Layout, PlacedSection
from axicfd.case.model import Case
from axicfd.errors import bad_input
from axicfd.mesh.grid import NOTHING, SOLID, STREAM, Array, Grid, Piece, frozen
from axicfd.mesh.spacing import Map, graded_map, length_weight, stretch_for_end_cell

NEST = 8  # finest counts are multiples of this: three clean halvings
LEVELS = 5  # meshes climbed, the finest included
CELLS = 40_000  # default number of cells of the finest mesh
ROUGH_ACROSS = 8  # least cells from the axis to the bore's wall for a rough answer
WORTHWHILE = 1.2  # least growth of the cells for which a finer family is solved
LEFT_OUT = 0.3  # of NEST cells: so much of what a segment should have is not worth another NEST
LARGEST_POWER = 100.0  # of refinement factors that are too small to change anything
ACROSS_STREAM = 48  # cells from the axis to the bore's wall in CELLS cells
ACROSS_SOLID = 8  # cells across a layer up to half as thick as the bore's radius
STRETCH_TO_WALLS = 4.0  # largest over smallest cell across a layer
END_CELL = 0.02  # first axial cell at a graded end, in bore radii
# Where a prescribed temperature begins beside another condition the flux grows like 1 / sqrt(distance). The
# conductances know that (solver.edges); the finer cells along z let the curves follow it.
END_CELL_SINGULAR = 0.002
OUTLET = "outlet"  # a kind of place: cells are graded to it, but the scheme along z stays the same up to there
SAME_RADIUS = 1e-9  # radii closer than this share of the outer radius are one interface


@dataclass(frozen=True)
class Segment:
    """A stretch of a mesh line: n cells on the finest level between two coordinates, graded by one smooth map."""

    start: float
    end: float
    cells: int
    map: Map

    def faces(self, level: int) -> Array:
        """Faces on a level without the first one. Level 0 is the finest of the family, 1 half of it, -1 twice."""
        n = self.cells
        for _ in range(level):
            if n % 2 == 0:
                n //= 2
        if level < 0:
            n *= 2 ** (-level)
        x = self.map(np.arange(1, n + 1) / n)
        x[-1] = 1.0
        return self.start + (self.end - self.start) * x


@dataclass(frozen=True)
class Place:
    """A named place where cells are graded to and, if `singular`, where the exact field is not smooth."""

    name: str
    z: float
    kind: str
    singular: bool

    @property
    def is_step(self) -> bool:
        """Whether a prescribed temperature begins here."""
        return self.kind == "joint" and self.singular


@dataclass(frozen=True)
class Family:
    """The nested grids of one case."""

    layout: Layout
    radial: tuple[Segment, ...]
    axial: tuple[Segment, ...]
    places: tuple[Place, ...]

    @property
    def counts(self) -> dict[str, int]:
        """Cells of the finest mesh, as the keys of `[mesh]` name them."""
        return {
            "radial": sum(s.cells for s in self.radial if s.end <= self.layout.bore_diameter / 2 * (1 + SAME_RADIUS)),
            "axial": sum(s.cells for s in self.axial),
        }

    @property
    def cells(self) -> int:
        """Cells of the finest mesh."""
        return sum(s.cells for s in self.radial) * sum(s.cells for s in self.axial)

    @property
    def rough_level(self) -> int:
        """Level of the coarse mesh that still tells the story to a few per cent, where many cases are looked through:
        a sixteenth of the finest one's cells as long as that leaves ROUGH_ACROSS of them across the bore.
        """
        return max((m for m in (1, 2) if self.counts["radial"] >= ROUGH_ACROSS * 2**m), default=0)

    def refined(self, radial: Sequence[float], axial: Sequence[float], at_most: int) -> "Family | None":
        """The family whose segments have so many times the cells on the finest mesh.

        radial, axial : one factor >= 1 for each segment
        Where that is more than `at_most` cells, all factors, or those of one direction alone, are less in proportion
        of their logarithms; where it is hardly more than there are, they are larger. None where there is no such
        family. The maps stay; counts stay multiples of NEST.
        """
        enough = WORTHWHILE * self.cells
        if self._finer(radial, axial, 1.0).cells < enough:
            below = self._finer_below(radial, axial, enough, LARGEST_POWER)
            tried = [self._finer(radial, axial, below * (1.0 + 1e-6))]
        else:
            ways = (radial, axial), (radial, [1.0] * len(axial)), ([1.0] * len(radial), axial)
            tried = [self._finer(*way, self._finer_below(*way, at_most + 1, 1.0)) for way in ways]
        good = [finer for finer in tried if enough <= finer.cells <= at_most]
        return max(good, key=lambda finer: finer.cells, default=None)

    def _finer(self, radial: Sequence[float], axial: Sequence[float], power: float) -> "Family":
        return replace(self, radial=_more(self.radial, radial, power), axial=_more(self.axial, axial, power))

    def _finer_below(self, radial: Sequence[float], axial: Sequence[float], cells: float, largest: float) -> float:
        """The largest power of the factors with fewer cells than given; cells grow with it by steps."""
        if self._finer(radial, axial, largest).cells < cells:
            return largest
        low, high = 0.0, largest
        for _ in range(40):
            power = 0.5 * (low + high)
            low, high = (power, high) if self._finer(radial, axial, power).cells < cells else (low, power)
        return low

    def coarsened(self, radial: int | None = None, axial: int | None = None) -> "Family":
        """The family with half the cells in one segment, given by its number along r or along z."""
        return replace(self, radial=_halved(self.radial, radial), axial=_halved(self.axial, axial))

    def like(self, other: "Family") -> "Family":
        """This family with the counts and maps of another one, segment by segment from the axis and from z = 0.

        Radial segments correspond in their order, axial ones where both tubes have as many sections; a void, of one
        cell, only to a void. Segments without a counterpart stay as they are.
        """
        radial = [_as_there(own, there) for own, there in zip(self.radial, other.radial, strict=False)]
        axial = self.axial
        if len(axial) == len(other.axial):
            axial = tuple(_as_there(own, there) for own, there in zip(axial, other.axial, strict=True))
        return replace(self, radial=(*radial, *self.radial[len(radial) :]), axial=axial)

    def grid(self, level: int = 0, radial_level: int | None = None) -> Grid:
        """The grid of a level: 0 the finest, 1, 2 ... coarser, -1, -2 ... two or four times finer per direction.

        radial_level : of the faces along r, where it is not that of the faces along z
        """
        z = _line(self.axial, level)
        r = _line(self.radial, level if radial_level is None else radial_level)
        return _grid(self.layout, z, r, tuple(p.z for p in self.places if p.kind != OUTLET))


def family(case: Case, layout: Layout) -> Family:
    """Choose the finest mesh of a case.

    Radial cells first (stream, then the other layers in proportion); the rest of the budget goes along z, shared
    between sections by the logarithm of their length and by their graded ends.
    """
    choice = case.mesh
    budget = choice.at_most or CELLS
    if case.solve.accuracy is not None:
        budget = min(budget, CELLS)  # to begin with; it is refined as far as needed
    places = _places(case, layout)
    radial = _radial_segments(case, layout, budget)
    across = sum(s.cells for s in radial)
    radius = layout.bore_diameter / 2

    def graded(z: float, only_steps: bool = False) -> bool:
        return any(abs(z - p.z) <= SAME_RADIUS * layout.length and (p.is_step or not only_steps) for p in places)

    weights = [length_weight(s.z1 - s.z0, radius, graded(s.z0) + graded(s.z1)) for s in layout.sections]
    along = choice.axial or max(NEST * len(weights), budget // across)
    axial = []
    for section, weight in zip(layout.sections, weights, strict=True):
        length = section.z1 - section.z0
        share = along * weight / sum(weights)
        cells = NEST * max(1, ceil(share / NEST - 1e-9) if choice.axial else int(share / NEST))
        at_start, at_end = graded(section.z0), graded(section.z1)
        stretch = choice.stretch_to_ends
        if stretch is None:
            step = graded(section.z0, True) or graded(section.z1, True)
            end_cell = (END_CELL_SINGULAR if step else END_CELL) * radius
            stretch = stretch_for_end_cell(cells, length, end_cell, at_start, at_end)
        axial.append(Segment(section.z0, section.z1, cells, graded_map(stretch, at_start, at_end)))
    total = across * sum(s.cells for s in axial)
    if choice.at_most is not None and total > choice.at_most:
        counts = f"{across} x {sum(s.cells for s in axial)} cells"
        allowed = (
            f"is less than the {counts} that {'`radial` and `axial` ask' if choice.axial else 'this case needs'} for"
        )
        raise bad_input("mesh.at_most", choice.at_most, allowed, f"Write at_most = {total} or more, or leave it out.")
    return Family(layout, radial, tuple(axial), places)


def _radial_segments(case: Case, layout: Layout, budget: int) -> tuple[Segment, ...]:
    radii = _interfaces(layout)
    stretch = case.mesh.stretch_to_walls or STRETCH_TO_WALLS
    bore = layout.bore_diameter / 2
    stream_cells = case.mesh.radial or ACROSS_STREAM * min(4.0, max(0.25, sqrt(budget / CELLS)))
    wanted = {layer.name: layer.cells_across for layer in _declared_layers(case) if layer.cells_across}
    segments = []
    for a, b in zip(radii[:-1], radii[1:], strict=True):
        layers = [p for s in layout.sections for p in s.layers if p.r_inner < 0.5 * (a + b) < p.r_outer]
        asked = [wanted[p.name] * (b - a) / (p.r_outer - p.r_inner) for p in layers if p.name in wanted]
        if all(p.kind == "void" for p in layers):
            segments.append(Segment(a, b, 1, graded_map(1.0, False, False)))
            continue
        if asked:
            n = max(asked)
        elif any(p.kind == "stream" for p in layers):
            n = stream_cells
        else:
            n = stream_cells / ACROSS_STREAM * ACROSS_SOLID * min(4, ceil(2 * (b - a) / bore))
        cells = NEST * ceil(n / NEST - 1e-9)
        segments.append(Segment(a, b, cells, graded_map(stretch, a > 0.0, True)))
    return tuple(segments)


def _declared_layers(case: Case):
    yield from case.layer
    for section in case.section:
        yield from section.layer or ()


def _interfaces(layout: Layout) -> list[float]:
    """All radii at which some section changes its material, axis included, in rising order."""
    raw = sorted({r for s in layout.sections for p in s.layers for r in (p.r_inner, p.r_outer)})
    radii = [raw[0]]
    for r in raw[1:]:
        if r - radii[-1] > SAME_RADIUS * raw[-1]:
            radii.append(r)
    return radii


def _places(case: Case, layout: Layout) -> tuple[Place, ...]:
    """Inlets, joints and ends that cells are graded to, by name; and outlets of tubes heated up to there.

    Nothing is conducted through the outlet plane, so a wall that gets hotter along z bends in a thin layer before it.
    """
    places = []
    for name in layout.stream_names:
        stream = case.stream[name]
        z = 0.0 if stream.direction == "+z" else layout.length
        places.append(Place(f"inlet of {name}", z, "inlet", stream.slips_at_inlet))
        last = layout.sections[-1 if stream.direction == "+z" else 0]
        if last.is_heated and not stream.is_still:
            places.append(Place(f"outlet of {name}", layout.length - z, OUTLET, False))
    for end, z in (("first", 0.0), ("last", layout.length)):
        conditions = getattr(case.ends, end)
        if any(not c.insulated for c in conditions.values()):
            places.append(Place(f"{end} end", z, "end", False))
    for a, b in zip(layout.sections[:-1], layout.sections[1:], strict=True):
        if not _alike(a, b):
            step = a.surface_is_held != b.surface_is_held
            places.append(Place(f"joint {a.name} | {b.name}", a.z1, "joint", step))
    return tuple(places)


def _alike(a: PlacedSection, b: PlacedSection) -> bool:
    """Whether nothing changes at the joint of two sections but the name."""
    per_length = [
        [(p.kind, p.material, p.r_inner, p.r_outer, p.contact_resistance, p.heat_per_volume) for p in s.layers]
        + [p.generated / (s.z1 - s.z0) for p in s.layers]
        for s in (a, b)
    ]
    return per_length[0] == per_length[1] and a.outside == b.outside


def coarser(grid: Grid) -> Grid | None:
    """The grid with every second face of a grid, where a section or a layer has an even number of cells; None if
    none has.

    Works on any grid of a family, also below its coarsest level; layers and sections keep at least one cell.
    """
    z = _every_second(grid.z, sorted({p.i0 for p in grid.pieces} | {grid.nz}))
    r = _every_second(grid.r, sorted({p.j0 for p in grid.pieces} | {p.j1 for p in grid.pieces}))
    if len(z) == len(grid.z) and len(r) == len(grid.r):
        return None
    return _grid(grid.layout, frozen(z), frozen(r), tuple(grid.z[i] for i in grid.joints))


def _more(segments: tuple[Segment, ...], factors: Sequence[float], power: float) -> tuple[Segment, ...]:
    """Segments with factor^power times the cells; those with fewer than NEST cells, the voids, stay as they are."""
    return tuple(
        replace(s, cells=NEST * max(s.cells // NEST, ceil(s.cells * f**power / NEST - LEFT_OUT)))
        if s.cells >= NEST
        else s
        for s, f in zip(segments, factors, strict=True)
    )


def _halved(segments: tuple[Segment, ...], one: int | None) -> tuple[Segment, ...]:
    return tuple(replace(s, cells=s.cells // 2) if k == one else s for k, s in enumerate(segments))


def _as_there(own: Segment, there: Segment) -> Segment:
    return replace(own, cells=there.cells, map=there.map) if (own.cells < NEST) == (there.cells < NEST) else own


def _every_second(faces: Array, ends: list[int]) -> Array:
    keep = np.ones(len(faces), dtype=bool)
    for a, b in zip(ends[:-1], ends[1:], strict=True):
        if (b - a) % 2 == 0:
            keep[a + 1 : b : 2] = False
    return faces[keep]


def _line(segments: tuple[Segment, ...], level: int) -> Array:
    return frozen(np.concatenate([[segments[0].start], *(s.faces(level) for s in segments)]))


def _grid(layout: Layout, z: Array, r: Array, graded: tuple[float, ...]) -> Grid:
    nz, nr = len(z) - 1, len(r) - 1
    zc, rc = 0.5 * (z[1:] + z[:-1]), 0.5 * (r[1:] + r[:-1])
    piece = np.full((nz, nr), -1, dtype=np.int64)
    kind = np.full((nz, nr), NOTHING, dtype=np.int8)
    section = np.searchsorted([s.z1 for s in layout.sections[:-1]], zc).astype(np.int64)
    outer = np.zeros(nz, dtype=np.int64)
    pieces: list[Piece] = []
    streams: dict[str, tuple[int, int]] = {}
    for k, placed in enumerate(layout.sections):
        i0, i1 = np.searchsorted(section, [k, k + 1])
        for layer in placed.layers:
            j0, j1 = np.searchsorted(rc, [layer.r_inner, layer.r_outer])
            cells = slice(i0, i1), slice(j0, j1)
            piece[cells] = len(pieces)
            kind[cells] = {"stream": STREAM, "solid": SOLID}.get(layer.kind, NOTHING)
            outer[i0:i1] = max(j1, outer[i0])
            pieces.append(Piece(k, layer, int(i0), int(i1), int(j0), int(j1)))
            if layer.kind == "stream":
                streams[layer.material] = (int(j0), int(j1))
    joints = tuple(int(np.argmin(np.abs(z - place))) for place in graded)
    return Grid(
        layout, z, r, tuple(pieces), frozen(piece), frozen(kind), frozen(section), frozen(outer), streams, joints
    )
