"""The main job: one scenario from its parameters to probabilities, drivers and a results folder."""

import hashlib
import io
import json
import logging
import time
from collections.abc import Callable, Iterator, Mapping
from concurrent.futures import Executor
from contextlib import ExitStack
from dataclasses import dataclass
from datetime import UTC, datetime
from pathlib import Path
from typing import TYPE_CHECKING, Any

import numpy as np
from numpy.typing import NDArray

from probsoil._typing import FloatArray
from probsoil.assessment.caveats import warning_rows
from probsoil.assessment.circles import circle_rows
from probsoil.assessment.description import (
    dependence_rows,
    fixed_values,
    ground_record,
    parameter_rows,
)
from probsoil.assessment.discretisation import discretisation_error
from probsoil.assessment.evaluation import Study, drawn_parameters, prepare
from probsoil.assessment.evidence_record import evidence_record, tested_words
from probsoil.assessment.further import FURTHER, GroundRuns, precision_of, precision_record
from probsoil.assessment.identity import identity_of
from probsoil.assessment.record import (
    CONFIDENCE,
    CampaignSample,
    added_fill_rows,
    bearing_rows,
    driver_rows,
    limit_rows,
    settlement_record,
    slip_rows,
)
from probsoil.assessment.results_folder import CHUNKS, COPY, REALISATIONS_FILE, RESULTS, claimed_folder
from probsoil.assessment.scenario_copy import copies, evidence_digests
from probsoil.assessment.statements import CAUTIONS, assumptions
from probsoil.assessment.together import together_record
from probsoil.campaign import (
    NOTICE,
    deferred_interrupt,
    discard_chunks,
    provenance,
    run_campaign,
    thread_pool,
    worker_count,
    write_durably,
)
from probsoil.errors import ParameterError
from probsoil.ground.response import ground_state
from probsoil.ground.stations import section_values
from probsoil.probability import exceeds
from probsoil.scenario import Scenario
from probsoil.sensitivity import DriverSums, driver_sums, drivers, merge

if TYPE_CHECKING:
    import pandas as pd

Progress = Callable[[str, int, int], None]
REALISATIONS = "realisations"
"""Name of the stage that progress is reported for."""

GREATEST_REALISATIONS = 100_000_000
"""As in the scenario file, [-]."""
GREATEST_SEED = 2**63 - 1
"""As in the scenario file, [-]."""

logger = logging.getLogger(__name__)


@dataclass(frozen=True, slots=True, eq=False, kw_only=True)
class Assessment:
    """Result of an assessment.

    Attributes
    ----------
    results : dict
        Content of results.json.
    sample : CampaignSample
        Quantities of every limit in every realisation.
    folder : Path or None
        Where the results were written.
    """

    results: dict[str, Any]
    sample: CampaignSample
    folder: Path | None

    def to_frame(self) -> "pd.DataFrame":
        """Return the limits as a table.

        Returns
        -------
        frame : pandas.DataFrame
            One row per limit: probability, interval, verdict.
        """
        import pandas as pd  # deferred: a scenario check never needs it

        rows = [
            {key: value for key, value in row.items() if not isinstance(value, dict | list)}
            | {"low": row["interval"][0], "high": row["interval"][1]}
            for row in self.results["limits"]
        ]
        return pd.DataFrame(rows)

    def _repr_html_(self) -> str:
        """Return the table of limits for a notebook."""
        return str(self.to_frame().to_html(index=False))


def assess(  # noqa: PLR0913 - one call with named options, each with a default
    scenario: Scenario,
    *,
    out: Path | None = None,
    realisations: int | None = None,
    draws: str | None = None,
    seed: int | None = None,
    workers: int | None = None,
    within: float | None = None,
    time_limit: float | None = None,
    resume: bool = False,
    force: bool = False,
    progress: Progress | None = None,
    command: str | None = None,
    source: Path | None = None,
    executor_factory: Callable[[], Executor] | None = None,
) -> Assessment:
    """Return how likely each limit is exceeded and what drives it.

    Parameters
    ----------
    scenario : Scenario
        As read.
    out : Path or None
        Folder for the results; None to write nothing. Chunks that an interrupted run of the same
        campaign left there are gone on from.
    realisations : int or None, [-]
        Number of realisations, instead of the scenario's.
    draws : str or None
        Way of drawing, instead of the scenario's.
    seed : int or None, [-]
        Seed, instead of the scenario's.
    workers : int or None, [-]
        Number of workers; None for every core. The numbers do not depend on it.
    within : float or None, [-]
        Longer arm of the interval over the chance at which each limit is done; further runs are made where
        the realisations do not reach it.
    time_limit : float or None, [s]
        Time after which no further runs are begun, instead of as many as there are realisations.
    resume : bool
        Whether to insist that `out` holds chunks to go on from.
    force : bool
        Whether chunks of another campaign, and files that no run wrote, are replaced in `out`.
    progress : callable or None
        Called with a stage name, chunks done and chunks in all.
    command : str or None
        Command line, for the record.
    source : Path or None
        File the scenario was read from; it is copied to `out` and its digest goes into the record.
    executor_factory : callable or None
        Makes a `concurrent.futures.Executor` to evaluate chunks on, such as that of a cluster; None
        for threads.

    Returns
    -------
    assessment : Assessment
        Probabilities with intervals, drivers, settlement and slip safety.

    Raises
    ------
    ParameterError
        If an override is out of range, or a precision is asked of points that are not independent.
    ResultsError
        If `out` cannot be written, or another run is at work in it.
    UnfitFolderError
        If `out` holds chunks of another campaign or files that no run wrote, unless `force`, or no
        chunks where `resume` insists.
    StoppedEarly
        If the user interrupted; finished chunks are kept in `out`.
    """
    started, clock = datetime.now(UTC), time.perf_counter()
    scenario = _overridden(scenario, realisations=realisations, draws=draws, seed=seed)
    with ExitStack() as held:
        folder = None if out is None else held.enter_context(claimed_folder(out, source=source, force=force))
        with deferred_interrupt():
            study = prepare(scenario)
        precision = precision_of(study, within, time_limit)
        _announce_rounding(study)
        seconds = {"preparation": time.perf_counter() - clock}
        heard = None if progress is None else lambda done, total: progress(REALISATIONS, done, total)
        chunks = run_campaign(
            study,
            study.points.n_chunks,
            identity=identity_of(study),
            workers=workers,
            store=None if folder is None else folder / CHUNKS,
            resume=resume,
            force=force,
            executor_factory=executor_factory,
            progress=heard,
        )
        sample, sums = _collect(study, chunks)
        seconds[REALISATIONS] = time.perf_counter() - clock - seconds["preparation"]
        with deferred_interrupt():
            results = _results(study, sample, sums)
        if precision is not None:
            begun = time.perf_counter()
            with (executor_factory or thread_pool(workers))() as executor:
                ground = GroundRuns(study, executor, progress)
                results |= precision_record(study, sample, ground, precision, begun - clock)
            seconds[FURTHER] = time.perf_counter() - begun
        seconds["total"] = time.perf_counter() - clock
        results["provenance"] = provenance(
            {
                "scenario_file": None if source is None else source.name,
                "scenario_sha256": _digest(scenario, source),
                **evidence_digests(scenario),
                "chunks": study.points.n_chunks,
            },
            started=started,
            seconds=seconds,
            workers=worker_count(workers),
            command=command,
        )
        if folder is not None:
            _write(folder, results, sample, scenario, source)
        return Assessment(results=results, sample=sample, folder=folder)


def _overridden(
    scenario: Scenario, *, realisations: int | None, draws: str | None, seed: int | None
) -> Scenario:
    """Return the scenario with the caller's numbers in place of its own."""
    if realisations is not None and not 1 <= realisations <= GREATEST_REALISATIONS:
        raise ParameterError(f"realisations must be 1 to {GREATEST_REALISATIONS:,d}; got {realisations:,d}")
    if seed is not None and not 0 <= seed <= GREATEST_SEED:
        raise ParameterError(f"seed must be 0 to {GREATEST_SEED}; got {seed}")
    given = {"realisations": realisations, "draws": draws, "seed": seed}
    return scenario.model_copy(update={key: value for key, value in given.items() if value is not None})


def _announce_rounding(study: Study) -> None:
    """Say before the work begins that the way of drawing takes more realisations than were asked for."""
    asked, drawn = study.scenario.realisations, study.points.n
    if drawn != asked:
        logger.log(
            NOTICE,
            f"{asked:,d} realisations asked, {drawn:,d} drawn: {study.points.name} takes "
            f"{study.points.replicates} equal sets"
            + (", each a power of two" if study.points.name == "sobol" else ""),
        )


def _collect(
    study: Study, chunks: Iterator[tuple[int, Mapping[str, NDArray[np.generic]]]]
) -> tuple[CampaignSample, list[DriverSums]]:
    """Gather what the results need from the chunks, in their order."""
    kept: dict[str, list[NDArray[np.generic]]] = {}
    sums: list[DriverSums] = []
    for index, arrays in chunks:
        for name, array in arrays.items():
            kept.setdefault(name, []).append(array)
        kept.setdefault("replicate", []).append(study.points.replicate_index(index))
        mine = _driver_sums(study, index, np.asarray(arrays["quantity"], dtype=np.float64))
        sums = mine if not sums else [merge(a, b) for a, b in zip(sums, mine, strict=True)]
    whole: dict[str, Any] = {name: np.concatenate(parts) for name, parts in kept.items()}
    return CampaignSample(**whole), sums


def _driver_sums(study: Study, chunk: int, quantity: FloatArray) -> list[DriverSums]:
    """Return the sums over one chunk that the drivers of each limit are found from."""
    z = study.latent(chunk)
    replicated = study.points.replicates > 1
    group = study.points.replicate_index(chunk) if replicated else None
    _, gathering = drawn_parameters(study)
    return [
        driver_sums(
            z,
            study.space.inverse_correlation,
            quantity[:, column],
            exceeds(quantity[:, column], limit.threshold, limit.sense),
            group,
            gathering=gathering,
        )
        for column, limit in enumerate(study.scenario.limits)
    ]


def _results(study: Study, sample: CampaignSample, sums: list[DriverSums]) -> dict[str, Any]:
    scenario, site = study.scenario, study.site
    error = discretisation_error(study)
    at_means, at_medians = (
        ground_state(site, section_values(scenario, fixed_values(study.space.at(point))))
        for point in ("mean", "median")
    )
    circles = circle_rows(study, sample.circle, at_medians)
    names, gathering = drawn_parameters(study)
    found = [
        drivers(one, study.space.correlation, names, confidence=CONFIDENCE, gathering=gathering)
        for one in sums
    ]
    rows, quality = driver_rows(scenario.limits, found)
    return {
        "format": scenario.format,
        "kind": "assess",
        "title": scenario.title,
        "seed": scenario.seed,
        "realisations": study.points.n,
        "draws": study.points.name,
        "confidence": CONFIDENCE,
        "currency": scenario.currency,
        "limits": limit_rows(study, sample),
        **together_record(study, sample),
        "settlement": settlement_record(study, sample),
        "slip": [
            row | {"circle": circle} for row, circle in zip(slip_rows(study, sample), circles, strict=True)
        ],
        "bearing": bearing_rows(study, sample),
        "added_fill": added_fill_rows(site, sample),
        "drivers": rows,
        "driver_quality": quality,
        "ground": ground_record(study, at_means),
        "parameters": parameter_rows(study),
        "dependence": dependence_rows(study),
        **evidence_record(study.space, scenario),
        "discretisation": error.to_dict(),
        "warnings": warning_rows(study, sample, error),
        "assumptions": list(assumptions(site, stations=len(study.stations)) + tested_words(scenario)),
        "cautions": list(CAUTIONS),
    }


def _digest(scenario: Scenario, source: Path | None) -> str:
    content = repr(scenario).encode() if source is None else source.read_bytes()
    return hashlib.sha256(content).hexdigest()


def _write(
    folder: Path, results: dict[str, Any], sample: CampaignSample, scenario: Scenario, source: Path | None
) -> None:
    """Write the results; the chunks go only when everything else is safely there."""
    buffer = io.BytesIO()
    names = np.array([row["name"] for row in results["limits"]])
    np.savez_compressed(
        buffer,
        limit=names,
        quantity=sample.quantity,
        slip=sample.slip,
        bearing=sample.bearing,
        final=sample.final,
        fill_added=sample.fill_added,
    )
    write_durably(folder / REALISATIONS_FILE, buffer.getvalue())
    if source is not None and source.resolve() != (folder / COPY).resolve():
        for name, content in copies(source, scenario).items():
            write_durably(folder / name, content)
    text = json.dumps(results, indent=1, allow_nan=False, ensure_ascii=False) + "\n"
    write_durably(folder / RESULTS, text.encode())
    discard_chunks(folder / CHUNKS)
