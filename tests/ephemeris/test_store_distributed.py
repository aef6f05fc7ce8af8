"""Tracks built on a cluster: any executor of the standard library's kind will do, dask.distributed's too."""

from __future__ import annotations

import warnings
from pathlib import Path

import numpy as np
import pytest

from wanderers.ephemeris.blocks import Block
from wanderers.ephemeris.store import TrackStore, read_block

distributed = pytest.importorskip("distributed", reason="the extra 'distributed' is not installed")

BLOCKS = range(16, 20)


def blocks_of(store: TrackStore) -> list[Block]:
    """Read what was kept."""
    return [read_block(store._path(i), i, store._stamp(), store.kernel.bodies) for i in BLOCKS]


@pytest.mark.long
@pytest.mark.filterwarnings("ignore")  # the cluster's own
def test_a_cluster_builds_the_same_blocks(store: TrackStore, tmp_path: Path) -> None:
    store.ensure(BLOCKS)
    told: list[tuple[int, int]] = []
    with (
        warnings.catch_warnings(),
        distributed.LocalCluster(n_workers=2, threads_per_worker=1, dashboard_address=None) as cluster,
        distributed.Client(cluster) as client,
    ):
        remote = TrackStore(
            store.kernel,
            tmp_path,
            client.get_executor(),
            progress=lambda done, total: told.append((done, total)),
        )
        remote.ensure(BLOCKS)
    assert told[-1] == (len(BLOCKS), len(BLOCKS))
    for ours, theirs in zip(blocks_of(store), blocks_of(remote), strict=True):
        assert ours.bodies == theirs.bodies
        for name in ("planets", "moon", "observer"):
            one, other = getattr(ours, name), getattr(theirs, name)
            np.testing.assert_array_equal(one.coefficients, other.coefficients)
            np.testing.assert_array_equal(one.middle_jd, other.middle_jd)
