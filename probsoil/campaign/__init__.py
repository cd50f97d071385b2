"""Evaluates numbered chunks of any function in bulk: workers, what reaches disk, provenance.

Nothing here knows what a chunk computes. A chunk depends on its number alone, so the results
are the same bit for bit for any number of workers and any order in which they finish.
"""

from probsoil.campaign.execution import run_campaign
from probsoil.campaign.files import prepare_folder, write_durably
from probsoil.campaign.identity import Identity, campaign_identity, source_digest
from probsoil.campaign.interruption import deferred_interrupt, is_interrupt, termination_as_interrupt
from probsoil.campaign.lock import LOCK, locked_folder
from probsoil.campaign.provenance import file_digest, provenance
from probsoil.campaign.store import NOTICE, ChunkStore, discard_chunks, kept_chunks, open_store
from probsoil.campaign.workers import process_pool, thread_pool, worker_count

__all__ = [
    "LOCK",
    "NOTICE",
    "ChunkStore",
    "Identity",
    "campaign_identity",
    "deferred_interrupt",
    "discard_chunks",
    "file_digest",
    "is_interrupt",
    "kept_chunks",
    "locked_folder",
    "open_store",
    "prepare_folder",
    "process_pool",
    "provenance",
    "run_campaign",
    "source_digest",
    "termination_as_interrupt",
    "thread_pool",
    "worker_count",
    "write_durably",
]
