"""The store of finished runs: keys, results, failures.

The folder's rule: a result is named by the digest of all that can change it, is written whole or not at all, and is
verified at every read; nothing that differs between two runs of the same thing stands in it.
"""

from bandbook.store.failure import Failure, placed_error
from bandbook.store.files import write_file
from bandbook.store.keys import canonical_json, code_digest, digest, environment, inputs_of, key_of
from bandbook.store.result import Result
from bandbook.store.store import Harvested, Store

__all__ = [
    "Failure",
    "Harvested",
    "Result",
    "Store",
    "canonical_json",
    "code_digest",
    "digest",
    "environment",
    "inputs_of",
    "key_of",
    "placed_error",
    "write_file",
]
