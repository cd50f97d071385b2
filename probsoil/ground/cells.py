"""Where the consolidation cells lie: finer towards every drained face."""

from dataclasses import dataclass, replace

import numpy as np

from probsoil._typing import BoolArray, FloatArray, IntArray
from probsoil.errors import ParameterError

DEFAULT_CELLS = 48
FOUNDATION_CELLS = 96  # below a foundation narrower than the ground is deep: its stress fades with depth
_FEWEST_PER_LAYER = 3
_FEWEST_PER_SEGMENT = 8
_LEAST_CUT = 0.02  # of a layer; a base nearer to a boundary gets no face of its own
_NEAR_SHARE = 0.03  # of a segment's thickness; how far the refinement at a drained face reaches


@dataclass(frozen=True, slots=True, eq=False, kw_only=True)
class Cells:
    """Cells of all clay layers, from ground level down.

    Attributes
    ----------
    layer : ndarray of int, shape (n_cell,), [-]
        Index of the layer that each cell belongs to.
    share : ndarray, shape (n_cell,), [-]
        Thickness of the cell as a share of its layer's thickness.
    centre : ndarray, shape (n_cell,), [-]
        Depth of the cell's centre below the top of its layer, same share.
    joined : ndarray of bool, shape (n_cell,), [-]
        Whether water can pass to the cell from the one listed before it.
    drained : ndarray, shape (n_cell,), [-]
        Number of faces (0, 1 or 2) at which the cell touches a freely draining boundary.
    """

    layer: IntArray
    share: FloatArray
    centre: FloatArray
    joined: BoolArray
    drained: FloatArray

    @property
    def n_cell(self) -> int:
        """Number of cells, [-]."""
        return int(self.layer.size)

    @property
    def segment(self) -> IntArray:
        """Drainage segment of each cell, counted from the top, shape (n_cell,), [-]."""
        return np.cumsum(~self.joined) - 1

    @property
    def n_segment(self) -> int:
        """Number of drainage segments, [-]."""
        return int(self.segment[-1]) + 1


def graded_cells(
    thickness: FloatArray,
    is_clay: BoolArray,
    *,
    base_drained: bool,
    load_depth: float = 0.0,
    target: int = DEFAULT_CELLS,
) -> Cells:
    """Return the cells of a profile.

    Parameters
    ----------
    thickness : ndarray, shape (n_layer,), [m]
        Mean thickness of each layer, from ground level down; it sets the grading only.
    is_clay : ndarray of bool, shape (n_layer,), [-]
        Whether a layer consolidates; the others drain freely and bound the segments.
    base_drained : bool
        Whether what lies below the last layer drains freely. Ground level always does.
    load_depth : float, [m]
        Depth of the base of a foundation, where water leaves as well: cells are fine there too, and
        one of their faces lies on it.
    target : int, [-]
        Number of cells to aim at over the whole profile.

    Returns
    -------
    cells : Cells
        At least three in a layer and eight in a drainage segment.

    Raises
    ------
    ParameterError
        If there is no clay layer.

    Notes
    -----
    A segment is a run of clay layers between draining boundaries. Cell size is in proportion to
    the distance from the nearest drained face plus 3 % of the segment, so that the steep
    early gradients there are resolved; segments share the cells by the square root of their
    thickness.
    """
    cut = _layer_cut(thickness, is_clay, load_depth)
    if cut is not None:
        index, share = cut
        parts = thickness[index] * np.array([share, 1.0 - share])
        thickness = np.concatenate([thickness[:index], parts, thickness[index + 1 :]])
        is_clay = np.insert(is_clay, index, True)
    cells = _graded(thickness, is_clay, base_drained, load_depth, target)
    return cells if cut is None else _joined(cells, *cut)


def _layer_cut(thickness: FloatArray, is_clay: BoolArray, load_depth: float) -> tuple[int, float] | None:
    """Return the clay layer that the base of a foundation cuts, and where, as a share of it."""
    bottom = np.cumsum(thickness)
    index = int(np.searchsorted(bottom, load_depth, side="right"))
    if index >= thickness.size or not is_clay[index]:
        return None
    share = float(1.0 - (bottom[index] - load_depth) / thickness[index])
    return (index, share) if _LEAST_CUT < share < 1.0 - _LEAST_CUT else None


def _joined(cells: Cells, index: int, share: float) -> Cells:
    """Return cells of a profile in which one layer stood in two parts, as cells of the whole layer."""
    upper, lower = cells.layer == index, cells.layer == index + 1
    scale = np.where(upper, share, np.where(lower, 1.0 - share, 1.0))
    return replace(
        cells,
        layer=np.where(cells.layer > index, cells.layer - 1, cells.layer),
        share=scale * cells.share,
        centre=scale * cells.centre + np.where(lower, share, 0.0),
    )


def _graded(
    thickness: FloatArray, is_clay: BoolArray, base_drained: bool, load_depth: float, target: int
) -> Cells:
    segments = _segments(is_clay)
    if not segments:
        raise ParameterError("is_clay must be true for at least one layer; got none")
    deep = [float(np.sqrt(thickness[first:last].sum())) for first, last in segments]
    parts = []
    for (first, last), weight in zip(segments, deep, strict=True):
        below_top = load_depth - float(thickness[:first].sum())
        count = max(_FEWEST_PER_SEGMENT, round(target * weight / sum(deep)))
        bottom_drains = base_drained if last == thickness.size else True
        parts.append(
            _segment_cells(
                thickness[first:last], count, bottom_drains=bottom_drains, first=first, face=below_top
            )
        )
    return Cells(
        layer=np.concatenate([part.layer for part in parts]),
        share=np.concatenate([part.share for part in parts]),
        centre=np.concatenate([part.centre for part in parts]),
        joined=np.concatenate([part.joined for part in parts]),
        drained=np.concatenate([part.drained for part in parts]),
    )


def _segments(is_clay: BoolArray) -> list[tuple[int, int]]:
    """Return (first, one past last) layer of every run of clay layers."""
    edges = np.diff(np.concatenate([[0], is_clay.astype(np.int64), [0]]))
    starts, ends = np.flatnonzero(edges == 1), np.flatnonzero(edges == -1)
    return [(int(a), int(b)) for a, b in zip(starts, ends, strict=True)]


def _segment_cells(
    thickness: FloatArray, count: int, *, bottom_drains: bool, first: int, face: float
) -> Cells:
    """Return the cells of one segment; a load begins `face` below its top, or nearer to ground level."""
    height = float(thickness.sum())
    depth = np.linspace(0.0, height, 4001)
    top = np.abs(depth - face) if 0.0 < face < height else depth
    distance = np.minimum(top, height - depth) if bottom_drains else top
    density = 1.0 / (distance + _NEAR_SHARE * height)
    done = np.concatenate([[0.0], np.cumsum(0.5 * (density[1:] + density[:-1]))])
    done /= done[-1]
    boundary = np.concatenate([[0.0], np.cumsum(thickness)])
    progress = np.interp(boundary, depth, done)
    layer, share, centre = [], [], []
    for index in range(thickness.size):
        upper, lower = progress[index], progress[index + 1]
        number = max(_FEWEST_PER_LAYER, round(count * (lower - upper)))
        edge = np.interp(np.linspace(upper, lower, number + 1), done, depth)
        edge[0], edge[-1] = boundary[index], boundary[index + 1]
        within = (edge - boundary[index]) / thickness[index]
        layer.append(np.full(number, first + index, dtype=np.int64))
        share.append(np.diff(within))
        centre.append(0.5 * (within[1:] + within[:-1]))
    total = sum(part.size for part in layer)
    joined = np.arange(total) > 0
    drained = np.zeros(total)
    drained[0] += 1.0
    if bottom_drains:
        drained[-1] += 1.0
    return Cells(
        layer=np.concatenate(layer),
        share=np.concatenate(share),
        centre=np.concatenate(centre),
        joined=joined,
        drained=drained,
    )
