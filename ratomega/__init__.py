"""Exact limits of instanton partition functions on rational Omega-backgrounds.

    >>> import ratomega
    >>> case = ratomega.load_case({
    ...     "charge": 2,
    ...     "background": {"eps1": "1", "eps2": "1"},
    ...     "node": [{"coulomb": ["1/3", "-1/3"]}],
    ... })
    >>> [str(coefficient.value) for coefficient in ratomega.limit(case)]
    ['1', '9/16', '23409/189728']

``ratomega.api`` lists the public names in one screen. It is read when the first of them is asked for, not before.
"""

from importlib import import_module
from typing import TYPE_CHECKING, Any

from ratomega.version import VERSION as __version__  # noqa: F401

if TYPE_CHECKING:
    from ratomega.api import *  # noqa: F403
else:

    def __getattr__(name: str) -> Any:
        """A public name, from ``ratomega.api``."""
        # The import machinery also asks for names like __path__, which no module of ours defines.
        if name == "__all__" or not name.startswith("__"):
            api = import_module("ratomega.api")
            if name == "__all__":
                return ["__version__", *api.__all__]
            if name in api.__all__:
                return globals().setdefault(name, getattr(api, name))
        raise AttributeError(f"module {__name__!r} has no attribute {name!r}")

    def __dir__() -> list[str]:
        return sorted({*globals(), *import_module("ratomega.api").__all__})
