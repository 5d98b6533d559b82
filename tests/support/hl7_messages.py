"""HL7 v2 results made for tests. Patients, orders and values are invented."""

from __future__ import annotations

from collections.abc import Sequence

LOINC = {"ph": "2744-1^pH^LN", "paco2": "2019-8^pCO2^LN", "pao2": "2703-7^pO2^LN", "hco3": "1960-4^HCO3^LN",
         "be": "1925-7^BE^LN", "lactate": "2518-9^Lactate^LN"}  # fmt: skip
UNITS = {"ph": "[pH]", "paco2": "kPa", "pao2": "kPa", "hco3": "mmol/L", "be": "mmol/L", "lactate": "mmol/L"}


def obx(
    channel: str, value: str, *, kind: str = "NM", status: str = "F", unit: str | None = None, at: str = ""
) -> str:  # fmt: skip
    """One OBX."""
    units = UNITS[channel] if unit is None else unit
    return f"OBX|1|{kind}|{LOINC[channel]}||{value}|{units}^^UCUM|||||{status}|||{at}"


def message(
    results: Sequence[str], *, patient: str = "0042^^^WARD-7^MR", order: str = "F1", at: str = "202603280025+0000",
    sent: str = "202603280030+0000", specimen: str = "BLDA", kind: str = "ORU^R01", number: int = 1, end: str = "\r",
) -> str:  # fmt: skip
    """One message; segments end with `end`."""
    segments = [
        f"MSH|^~\\&|ANALYSER|LAB|LOG|WARD|{sent}||{kind}|{number}|P|2.5.1",
        f"PID|1||{patient}||INVENTED^PERSON",
        f"OBR|1|P1|{order}|24336-0^Gas panel^LN|||{at}||||||||{specimen}",
        *results,
    ]
    return end.join(segments) + end


def gas(ph: str = "7.31", paco2: str = "8.1", pao2: str = "8.9", **more: str) -> list[str]:
    """The OBX of a gas."""
    return [obx("ph", ph, **more), obx("paco2", paco2, **more), obx("pao2", pao2, **more)]  # type: ignore[arg-type]
