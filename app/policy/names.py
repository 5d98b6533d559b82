"""Names of markers say their limits: where a ward has set others, its own must stand in the name."""

from __future__ import annotations

from collections.abc import Iterator

from app.look.formats import fixed, trimmed
from core.judgement.policy import Policy, shipped_policy
from core.physiology.constants import KPA_IN_MMHG

OWN = "its limit set here"


class _InForce:
    """The policy whose limits stand in names: one for the program, as there is one store."""

    policy: Policy | None = None


def use(policy: Policy) -> None:
    """From now on names say the limits of this policy."""
    _InForce.policy = policy


def in_force() -> Policy:
    """The policy whose numbers are shown: that in use, else the shipped one."""
    return _InForce.policy or shipped_policy()


def by_policy(key: str, name: str, policy: Policy | None = None) -> str:
    """The name of a marker with the limits of a policy (the one in use) in place of the shipped ones.

    Where a changed limit cannot be told from other numbers of the name, the name says that it is another.
    """
    policy = policy or _InForce.policy
    if policy is None or key not in policy.markers:
        return name
    for shipped, own in _changed(key, policy):
        if name.count(shipped) == 1:
            name = name.replace(shipped, own)
        elif any(c.isdigit() for c in name.replace("NEWS2", "")) and not name.endswith(f"({OWN})"):
            name = f"{name} ({OWN})"
    return name


def _changed(key: str, policy: Policy) -> Iterator[tuple[str, str]]:
    """(as shipped, own) of every limit that differs, as a name would write it."""
    shipped = shipped_policy()
    if key not in shipped.markers:
        return
    rule, own = shipped.markers[key], policy.markers[key]
    for name, value in rule.limits.items():
        if own.limits[name] != value:
            yield _written(name, value), _written(name, own.limits[name])
    for name, limit in rule.pressures.items():
        if own.pressures[name] != limit:
            mine = own.pressures[name]
            yield _pair(limit.mmHg, limit.kpa), _pair(mine.mmHg, mine.kpa)
    severe, mine_severe = shipped.state.severe_below_ph.value, policy.state.severe_below_ph.value
    if key == "ph_not_better_severe" and severe != mine_severe:
        yield _written("ph", severe), _written("ph", mine_severe)


def _written(name: str, value: float) -> str:
    if name.startswith("ph"):
        return fixed(value, 2) if round(value, 2) == value else trimmed(value, 3)
    if name == "pf":
        return _pair(value, value / KPA_IN_MMHG)
    return trimmed(value)


def _pair(mmhg: float, kpa: float) -> str:
    return f"{trimmed(mmhg)} mmHg ({trimmed(kpa, 1)} kPa)"
