"""A family of sweeps as files: a long table, arrays with an axis for the members."""

from __future__ import annotations

import io
from collections.abc import Sequence
from typing import TYPE_CHECKING

from acsolve.report.entry import Entry

if TYPE_CHECKING:
    from acsolve.analyses.sweep import Sweep


def setting_heads(entry: Entry) -> list[str]:
    """The heads of the columns that tell the members apart."""
    return [f"{item.name} ({item.unit})" if item.unit else item.name for item in entry.over]


def family_npz(entries: Sequence[Entry]) -> bytes:
    """Arrays under the names of the JSON keys, each of shape (members, frequencies).

    `hertz` is common to all, `over_names` and `over_values`, shape (members, names), say
    what makes each member, in SI units.
    """
    import numpy as np

    sweeps = [_sweep(entry) for entry in entries]
    store = io.BytesIO()
    np.savez(
        store,
        hertz=sweeps[0].hertz,
        over_names=np.array([item.name for item in entries[0].over]),
        over_values=np.array([[item.value for item in entry.over] for entry in entries]),
        value=np.array([found.value for found in sweeps]),
        gain_db=np.array([found.gain_db for found in sweeps]),
        phase_deg=np.array([found.phase_deg for found in sweeps]),
        phase_delay_s=np.array([found.phase_delay_s for found in sweeps]),
        group_delay_s=np.array([found.group_delay_s for found in sweeps]),
        status=np.array([found.status for found in sweeps]),
    )
    return store.getvalue()


def _sweep(entry: Entry) -> Sweep:
    assert entry.sweep is not None, "a member of a family holds a sweep"
    return entry.sweep
