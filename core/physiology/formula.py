"""How a formula meets its inputs: scalars and arrays alike, NaN where undefined, and always a reason.

`@formula()` wraps a function of plain arithmetic. Every parameter's name is looked up in `domains.DOMAINS`
(or given to the decorator), so that a missing or impossible input makes NaN instead of a wrong figure, and
`why_undefined` can say which input it was. This is the one mechanism of the room.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass
from functools import wraps
from inspect import Parameter, signature
from math import isnan, nan
from typing import Any, TypeVar, cast

import numpy as np

from core.physiology.domains import DOMAINS, Domain
from core.physiology.elementary import Values
from core.record.message import Message, Value

F = TypeVar("F", bound=Callable[..., Any])

ANY_RESULT = Domain("", -1e12, 1e12, "undefined.result_outside", "undefined.result_outside")
POSITIVE = Domain("", 1e-9, 1e12, "undefined.result_not_positive", "undefined.result_outside")

_CHUNK = 16_384
"""Elements worked on at a time: temporaries stay in the processor's cache, which pays for the checks."""


@dataclass(frozen=True, slots=True)
class Reasoned:
    """A scalar figure; where `value` is NaN, `reason` says why."""

    value: float
    reason: Message | None


@dataclass(frozen=True, slots=True)
class Plan:
    """A formula with its inputs' domains, its defaults, and the domain of its result."""

    name: str
    body: Callable[..., Any]
    inputs: tuple[tuple[str, Domain], ...]
    defaults: tuple[Any, ...]
    result: Domain

    def arguments(self, args: Sequence[Any], named: dict[str, Any]) -> list[Any]:
        """All inputs in order.

        Raises:
            TypeError: an input that the formula does not know, or one that it needs and did not get.
        """
        names = [name for name, _ in self.inputs]
        if len(args) > len(names) or not named.keys() <= set(names[len(args) :]):
            got = f"{len(args)} values and {sorted(named)}"
            raise TypeError(f"{self.name} takes {', '.join(names)}; got {got}")
        values = list(args)
        for name, default in zip(names[len(args) :], self.defaults[len(args) :], strict=True):
            value = named.get(name, default)
            if value is Parameter.empty:
                raise TypeError(f"{self.name} needs {name}; it takes {', '.join(names)}")
            values.append(value)
        return [nan if v is None else v for v in values]

    def scalar(self, values: Sequence[float]) -> float:
        """The figure for one set of inputs; NaN where undefined."""
        for (_, domain), value in zip(self.inputs, values, strict=True):
            if not domain.low <= value <= domain.high:
                return nan
        with np.errstate(all="ignore"):
            found = float(self.body(*(np.float64(v) for v in values)))
        return found if self.result.holds(found) else nan

    def array(self, values: Sequence[Any]) -> Values:
        """The figures for arrays that broadcast; NaN where undefined."""
        arrays = [np.asarray(v, dtype=np.float64) for v in values]
        shape = np.broadcast_shapes(*(a.shape for a in arrays))
        flat = [a if a.ndim == 0 else np.broadcast_to(a, shape).reshape(-1) for a in arrays]
        size = int(np.prod(shape, dtype=np.int64))
        out = np.empty(size, dtype=np.float64)
        with np.errstate(all="ignore"):
            for start in range(0, size, _CHUNK):
                part = slice(start, min(start + _CHUNK, size))
                self._part([a if a.ndim == 0 else a[part] for a in flat], out[part])
        return out.reshape(shape)

    def _part(self, values: Sequence[Values], out: Values) -> None:
        out[...] = self.body(*values)
        defined = _inside(out, self.result)
        for (_, domain), value in zip(self.inputs, values, strict=True):
            defined &= _inside(value, domain)
        np.copyto(out, nan, where=~defined)  # in place: `np.where` costs five times as much

    def why(self, values: Sequence[float]) -> Message | None:
        """Why the figure is undefined for these inputs, or None where it is defined."""
        for (name, domain), value in zip(self.inputs, values, strict=True):
            if isnan(value):
                return Message(domain.missing, {"figure": self.name, "input": name})
            if not domain.holds(value):
                return self._outside(domain, name, float(value))
        with np.errstate(all="ignore"):
            found = float(self.body(*(np.float64(v) for v in values)))
        return None if self.result.holds(found) else self._outside(self.result, "result", found)

    def _outside(self, domain: Domain, name: str, value: float) -> Message:
        key = domain.too_high if value > domain.high else domain.too_low  # NaN: what the low end says
        low, high = float(f"{domain.low:.7g}"), float(f"{domain.high:.7g}")
        values: dict[str, Value] = {"figure": self.name, "input": name, "value": value}
        return Message(key, values | {"low": low, "high": high, "unit": domain.unit})


def _inside(values: Values, domain: Domain) -> Any:
    """A mask of what lies in a domain; NaN never does."""
    return (values >= domain.low) & (values <= domain.high)


PLANS: dict[str, Plan] = {}
"""Every formula by `module.function`, for the catalogue and for the tests that try them all."""


def formula(result: Domain = ANY_RESULT, **domains: Domain) -> Callable[[F], F]:
    """Make a formula of a function of plain arithmetic; see the module.

    Args:
        result: the domain of the result; outside it the figure is NaN.
        domains: the domain of an input where it differs from `DOMAINS`.
    """

    def wrap(body: F) -> F:
        parameters = signature(body).parameters
        name = f"{body.__module__.rpartition('.')[2]}.{body.__name__}"
        inputs = tuple((p, domains[p] if p in domains else DOMAINS[p]) for p in parameters)
        plan = Plan(name, body, inputs, tuple(p.default for p in parameters.values()), result)
        PLANS[name] = plan

        @wraps(body)
        def evaluate(*args: Any, **named: Any) -> Any:
            values = plan.arguments(args, named)
            if all(np.ndim(v) == 0 for v in values):
                return plan.scalar([float(v) for v in values])
            return plan.array(values)

        evaluate.plan = plan  # type: ignore[attr-defined]
        return cast("F", evaluate)

    return wrap


def plan_of(figure: Callable[..., Any]) -> Plan:
    """The plan behind a formula.

    Raises:
        TypeError: the function is not a formula.
    """
    plan = getattr(figure, "plan", None)
    if not isinstance(plan, Plan):
        raise TypeError(f"{figure!r} is not a formula: only functions under @formula() carry their reasons")
    return plan


def why_undefined(figure: Callable[..., Any], *args: float | None, **named: float | None) -> Message | None:
    """Why a formula gives NaN for these scalar inputs; None where it gives a figure.

    >>> from core.physiology.oxygenation import pf_ratio
    >>> why_undefined(pf_ratio, 60.0, None).key
    'undefined.fio2_unknown'
    >>> why_undefined(pf_ratio, 60.0, 0.5) is None
    True
    """
    plan = plan_of(figure)
    return plan.why([float(v) for v in plan.arguments(args, named)])


def reasoned(figure: Callable[..., Any], *args: float | None, **named: float | None) -> Reasoned:
    """A scalar figure together with the reason where it is undefined.

    >>> from core.physiology.oxygenation import pf_ratio
    >>> reasoned(pf_ratio, 60.0, 0.5).value
    120.0
    """
    plan = plan_of(figure)
    values = [float(v) for v in plan.arguments(args, named)]
    value = plan.scalar(values)
    return Reasoned(value, plan.why(values) if isnan(value) else None)
