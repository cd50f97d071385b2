"""What tells one campaign from every other whose numbers would differ, and how two of them differ."""

import hashlib
import json
from collections.abc import Iterator, Mapping
from dataclasses import dataclass
from functools import cache
from importlib import resources
from importlib.resources.abc import Traversable

_SOURCES = (".py", ".html", ".css", ".js")


@dataclass(frozen=True, slots=True, kw_only=True)
class Identity:
    """Identity of a campaign: two that are equal have the same results.

    Attributes
    ----------
    stated : mapping of str to str
        Everything the results depend on that people can read (inputs, seed, versions), by name.
    fingerprints : mapping of str to str
        Digests of what is too long to read, by what a message calls it.
    """

    stated: Mapping[str, str]
    fingerprints: Mapping[str, str]

    @property
    def digest(self) -> str:
        """SHA-256 of all of it, 64 hexadecimal digits."""
        return hashlib.sha256(json.dumps(self.to_dict(), sort_keys=True).encode()).hexdigest()

    def to_dict(self) -> dict[str, dict[str, str]]:
        """Return both parts, ready for JSON.

        Returns
        -------
        dict
            Keys ``stated`` and ``fingerprints``.
        """
        return {"stated": dict(self.stated), "fingerprints": dict(self.fingerprints)}


def campaign_identity(stated: Mapping[str, object], **fingerprints: str) -> Identity:
    """Return the identity of a campaign.

    Parameters
    ----------
    stated : mapping
        Everything the results depend on, by name; values are told apart by their `repr`, strings
        by themselves.
    **fingerprints : str
        Digests of what is too long to read; an underscore in a name stands for a blank.

    Returns
    -------
    Identity
        The identity.

    Examples
    --------
    >>> campaign_identity({"seed": 3}).stated
    {'seed': '3'}
    """
    return Identity(
        stated={name: value if isinstance(value, str) else repr(value) for name, value in stated.items()},
        fingerprints={name.replace("_", " "): digest for name, digest in fingerprints.items()},
    )


def differences(found: Mapping[str, object], wanted: Identity) -> list[str]:
    """Return in words how a stored identity differs from the one that is asked for.

    Parameters
    ----------
    found : mapping
        As `Identity.to_dict` gave it once.
    wanted : Identity
        What is asked for now.

    Returns
    -------
    list of str
        One phrase for each difference; empty where there is none.
    """
    now = wanted.to_dict()
    before, after = _part(found, "stated"), now["stated"]
    phrases = [
        f"{name} was {before.get(name, 'not given')}, is {after.get(name, 'not given')}"
        for name in dict.fromkeys([*after, *before])
        if before.get(name) != after.get(name)
    ]
    seen, wants = _part(found, "fingerprints"), now["fingerprints"]
    return phrases + [
        f"{name} has changed" for name in dict.fromkeys([*wants, *seen]) if seen.get(name) != wants.get(name)
    ]


def _part(found: Mapping[str, object], name: str) -> Mapping[str, object]:
    part = found.get(name)
    return part if isinstance(part, Mapping) else {}


@cache
def source_digest(package: str = "probsoil") -> str:
    """Return the SHA-256 of a package's source files: modules and templates.

    A version number alone does not tell whether the code that made a chunk is the code at hand.

    Parameters
    ----------
    package : str
        Name of an importable package.

    Returns
    -------
    str
        64 hexadecimal digits.
    """
    digest = hashlib.sha256()
    for name, content in sorted(_sources(resources.files(package), "")):
        digest.update(f"{name}\n{len(content)}\n".encode())
        digest.update(content)
    return digest.hexdigest()


def _sources(folder: Traversable, prefix: str) -> Iterator[tuple[str, bytes]]:
    for entry in folder.iterdir():
        if entry.is_dir():
            if entry.name != "__pycache__":
                yield from _sources(entry, f"{prefix}{entry.name}/")
        elif entry.name.endswith(_SOURCES):
            yield f"{prefix}{entry.name}", entry.read_bytes()
