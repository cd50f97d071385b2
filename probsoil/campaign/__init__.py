"""Evaluates numbered chunks of any function in bulk: workers, what reaches disk, provenance.

Nothing here knows what a chunk computes. A chunk depends on its number alone, so the results
are the same bit for bit for any number of workers and any order in which they finish.
"""

from probsoil.campaign.execution import run_campaign
from probsoil.campaign.files import prepare_folder, write_durably
from probsoil.campaign.provenance import file_digest, provenance
from probsoil.campaign.store import ChunkStore, campaign_identity, discard_chunks, open_store
from probsoil.campaign.workers import process_pool, thread_pool, worker_count

__all__ = [
    "ChunkStore",
    "campaign_identity",
    "discard_chunks",
    "file_digest",
    "open_store",
    "prepare_folder",
    "process_pool",
    "provenance",
    "run_campaign",
    "thread_pool",
    "worker_count",
    "write_durably",
]
