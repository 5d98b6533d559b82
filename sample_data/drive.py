"""What drives breathing: CO2, oxygen lack, acid, inflammation; what quells it: narcosis, fatigue, sedation."""

from __future__ import annotations

import numpy as np

from sample_data.saturation import Values


def oxygen_lack(saturation: Values) -> Values:
    """0 at a saturation of 92 % and above, 1 at 80 %, at most 1.5.

    >>> oxygen_lack(np.array([0.95, 0.80])).round(2).tolist()
    [0.0, 1.0]
    """
    return np.asarray(np.clip((0.92 - saturation) / 0.12, 0.0, 1.5))


def narcosis(brain_paco2: Values, usual: Values, tolerance: Values) -> Values:
    """0 awake to 1 unrousable, as PaCO2 in the brain exceeds the usual by `tolerance` mmHg and more."""
    return np.asarray(1.0 / (1.0 + np.exp(-(brain_paco2 - usual - tolerance) / 5.0)))


def wanted_ventilation(
    at_usual: Values, paco2: Values, usual: Values, gain_per_10: Values, extra: Values, asleep: Values
) -> Values:
    """Alveolar ventilation (L/min) the brain asks for.

    `at_usual` holds PaCO2 at the usual value; each 10 mmHg above adds `gain_per_10` of it; `extra` is what
    inflammation, congestion and oxygen lack add, as a share; `asleep` (narcosis, sedation) takes away.
    """
    chemical = np.clip(1.0 + gain_per_10 * (paco2 - usual) / 10.0, 0.35, 3.0)
    return np.asarray(at_usual * chemical * (1.0 + extra) * (1.0 - 0.5 * asleep))


def tire(fatigue: Values, load: Values, tires_per_h: Values, rests_per_h: Values, minutes: float) -> Values:
    """Fatigue 0 to 1 after a short time: grows while the load on the muscles is above what lasts."""
    over = np.maximum(load - 0.72, 0.0) / 0.28
    under = np.maximum(0.72 - load, 0.0) / 0.72
    change = tires_per_h * over * (1.0 - fatigue) - rests_per_h * under * fatigue
    return np.asarray(np.clip(fatigue + change * minutes / 60.0, 0.0, 1.0))


def coma_scale(asleep: Values, lack: Values) -> Values:
    """GCS as a real number: 15 awake, down with narcosis and with severe oxygen lack."""
    return np.asarray(np.clip(15.3 - 8.0 * asleep - 1.2 * np.maximum(lack - 0.5, 0.0), 3.0, 15.0))
