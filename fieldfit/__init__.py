"""fieldfit: from field readings of flow and pressure to what has become of a pipe."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

if TYPE_CHECKING:
    from fieldfit.assessment import assess
    from fieldfit.report.finding import Finding

__all__ = ["Finding", "__version__", "assess"]
__version__ = "0.1.0"


def __getattr__(name: str) -> Any:
    """Load the main job only when it is asked for, so that `fieldfit --help` stays quick."""
    if name == "assess":
        from fieldfit.assessment import assess

        return assess
    if name == "Finding":
        from fieldfit.report.finding import Finding

        return Finding
    raise AttributeError(f"module 'fieldfit' has no attribute '{name}'")
