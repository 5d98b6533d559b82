"""Every figure of an episode, in groups: gas, oxygenation, breathing, mask and leak, trends, course."""

from __future__ import annotations

from collections.abc import Iterable, Iterator

from app.figures.course import course_rows
from app.figures.leak import leak_rows, mask_rows
from app.figures.rows import FigureGroup, FigureRow, RowInput, RowMaker, doubts_of, with_lines
from app.figures.trends import trend_rows
from app.figures.values import input_name, value_text
from app.look import formats
from app.telling.drawn import drawn_word
from app.telling.headline import beside_pf, gas_state_word, pf_word
from app.words import Reader
from core.judgement.derived import DerivedFigure, FigureInput, OxygenationFigure
from core.judgement.gas_reading import GasReading, read
from core.judgement.shapes import EpisodeFigures, GasFigure, RatioFigure
from core.record.message import Message

MODELLED = Message("caveat.tidal_volume_modelled_on_mask")
EXPECTED = "course"
"""The group of what is expected or lies between gases: it stands on the screen only, never in text to paste."""
_AGREES, _DISAGREES = "agrees", "does not agree"


def figure_groups(f: EpisodeFigures, reader: Reader) -> tuple[FigureGroup, ...]:
    """All groups from top to bottom; one that has no rows is left out."""
    make = RowMaker(reader, doubts_of(f.gases, reader), frozenset(g.at for g in f.gases if g.site_assumed))
    gas = latest_gas(f)
    modelled = make.say(MODELLED)
    made = (
        _group("gas", make.tr("Latest gas"), _gas_rows(f, gas, make), _plain_word(gas, make)),
        _group("oxygenation", make.tr("Oxygenation"), _oxygen_rows(f, gas, make), _named("P/F", f.pf, make)),
        _group("breathing", make.tr("Breathing"), _breathing_rows(f, make), _volume_word(f, make), modelled),
        _group("mask", make.tr("Mask and leak"), (*mask_rows(f, make), *leak_rows(f, make)), _mask_word(f, make)),
        _group("trends", make.tr("Trends"), trend_rows(f, make)),
        _group(EXPECTED, make.tr("After the last change"), course_rows(f, make)),
    )
    return tuple(group for group in made if group.rows)


def latest_gas(f: EpisodeFigures) -> GasFigure | None:
    """The newest gas that stands for an arterial one, else the newest venous one."""
    return next((g for g in reversed(f.gases) if g.site != "venous"), f.gases[-1] if f.gases else None)


def _group(key: str, title: str, rows: Iterable[FigureRow], summary: str = "", note: str = "") -> FigureGroup:
    return FigureGroup(key, title, tuple(rows), summary, note)


# the latest gas


def _gas_rows(f: EpisodeFigures, gas: GasFigure | None, make: RowMaker) -> Iterator[FigureRow]:
    venous = f.gases[-1] if f.gases and f.gases[-1].site == "venous" else None
    if gas is not None:
        age = f.profile.get("age")
        reading = read(gas, age if isinstance(age, float) else None)
        yield class_row(f, gas, reading, make)
        yield from _of_the_rules(gas, reading, make)
    if venous is not None and venous.rule_out is not None:
        inputs = {"paco2": FigureInput(venous.paco2_mmHg, venous.at)}
        yield FigureRow("venous_rule_out", make.name("venous_rule_out"), make.say(venous.rule_out), venous.at,
                        make.doubted.get(venous.at, ""), inputs=make.inputs(inputs), wide=True)  # fmt: skip


def class_row(f: EpisodeFigures, gas: GasFigure, reading: GasReading, make: RowMaker) -> FigureRow:
    """What a gas says in plain words, with the reasoning step by step."""
    text = make.say(reading.classification).rstrip(".")
    state = beside_pf(pf_word(f, gas, make.reader.gas_unit, make.reader.zone), gas_state_word(f, gas))
    why = "" if text else make.say(reading.classification_reason)
    inputs = {"ph": gas.ph, "paco2": gas.paco2_mmHg, "hco3": gas.hco3_calculated_mmol_L}
    notes = [make.tr("State: {state}").format(state=state)] if gas.state is not None else []
    if gas.site_assumed:
        notes.append(make.say(Message("gas.site_assumed")).rstrip("."))
    if gas.off_support:
        notes.append(formats.opened(drawn_word(gas)))
    row = FigureRow("gas_class", make.name("gas_class"), text, gas.at, make.doubted.get(gas.at, ""), tuple(notes),
                    why, make.inputs({k: FigureInput(v, gas.at) for k, v in inputs.items()}), wide=True)  # fmt: skip
    return with_lines(row, (make.say(step) for step in reading.steps))


def _of_the_rules(gas: GasFigure, reading: GasReading, make: RowMaker) -> Iterator[FigureRow]:
    ph, paco2 = FigureInput(gas.ph, gas.at), FigureInput(gas.paco2_mmHg, gas.at)
    hco3 = FigureInput(gas.hco3_calculated_mmol_L, gas.at)
    yield make.of(_plain("hco3_calculated", gas.hco3_calculated_mmol_L, gas, {"ph": ph, "paco2": paco2}))
    yield make.of(reading.hco3_expected_acute_mmol_L)
    yield make.of(reading.hco3_expected_chronic_mmol_L)
    yield make.of(reading.ph_expected_acute)
    yield make.of(reading.ph_expected_chronic)
    yield make.of(reading.usual_paco2_estimate_mmHg)
    yield make.of(reading.paco2_expected_metabolic_mmHg)
    yield make.of(_plain("sbe", gas.sbe_mmol_L, gas, {"hco3": hco3, "ph": ph}))
    yield make.of(reading.sbe_siggaard_mmol_L)
    yield make.of(reading.hydrogen_ion_nmol_L)
    yield _agreement(gas, make)
    yield make.of(reading.sao2_expected_percent, make.tr("Saturation expected of PaO2 and pH"))
    yield make.of(reading.ph_at_temperature)
    yield make.of(reading.paco2_at_temperature_mmHg)
    yield make.of(reading.pao2_at_temperature_mmHg)


def _plain(key: str, value: float | None, gas: GasFigure, inputs: dict[str, FigureInput]) -> DerivedFigure:
    """A figure that the gas itself carries; its field's name in the gas is its key with the unit."""
    field = {"hco3_calculated": "hco3_calculated_mmol_L", "sbe": "sbe_mmol_L", "aa_gradient": "aa_gradient_mmHg"}[key]
    return DerivedFigure(key, value, gas.at, inputs, reason=None if value is not None else gas.reasons.get(field))


def _agreement(gas: GasFigure, make: RowMaker) -> FigureRow:
    """Whether the reported bicarbonate belongs to this pH and PCO2."""
    name = make.tr("Reported bicarbonate against pH and PCO2")
    reported = make.tr("Bicarbonate, reported")
    inputs = (
        *make.inputs({"ph": FigureInput(gas.ph, gas.at), "paco2": FigureInput(gas.paco2_mmHg, gas.at)}),
        RowInput(reported, formats.quantity("hco3", gas.hco3_mmol_L), gas.at),
        *make.inputs({"hco3": FigureInput(gas.hco3_calculated_mmol_L, gas.at)}),
    )
    value = "" if gas.consistent is None else make.tr(_AGREES if gas.consistent else _DISAGREES)
    doubt = make.doubted.get(gas.at, "") if gas.consistent is False else ""
    why = "" if value else make.say(gas.reasons.get("consistent")) or make.tr("Not checked")
    row = FigureRow("hco3_difference", name, value, gas.at, doubt, (), why, inputs)
    return with_lines(row, (make.say(m) for m in (*gas.warnings, *gas.explanations)))


def _plain_word(gas: GasFigure | None, make: RowMaker) -> str:
    if gas is None:
        return ""
    return make.say(read(gas).classification).rstrip(".")


# oxygenation


def _oxygen_rows(f: EpisodeFigures, gas: GasFigure | None, make: RowMaker) -> Iterator[FigureRow]:
    o = f.oxygenation
    yield make.of(_newest("pf", f.pf))
    yield make.of(_newest("sf", f.sf))
    yield from _gradients(f, gas, make)
    yield make.of(o.pf_imputed_mmHg, make.tr("P/F imputed (non-linear)"))
    yield make.of(_newest("rox", f.rox))
    yield make.of(o.rox_hr)
    yield make.of(o.mrox)
    yield make.of(o.mean_airway_pressure_cmH2O, make.tr("Mean airway pressure"))
    yield make.of(o.oxygenation_index)
    yield make.of(o.oxygen_saturation_index)
    yield from _bands(o, make)
    yield make.of(o.pf_imputed_linear_mmHg, make.tr("P/F imputed (linear)"))
    yield make.of(o.pf_imputed_loglinear_mmHg, make.tr("P/F imputed (log-linear)"))


def _bands(o: OxygenationFigure, make: RowMaker) -> Iterator[FigureRow]:
    yield make.of(o.berlin_2012, make.tr("Oxygenation band, Berlin definition 2012"))
    yield make.of(o.global_2023, make.tr("Oxygenation criterion, global definition 2023/24"))


def _gradients(f: EpisodeFigures, gas: GasFigure | None, make: RowMaker) -> Iterator[FigureRow]:
    if gas is None:
        return
    inputs = {"pao2": gas.pao2_mmHg, "paco2": gas.paco2_mmHg, "fio2": gas.fio2}
    given = {k: FigureInput(v, gas.at) for k, v in inputs.items()}
    age = f.profile.get("age")
    reading = read(gas, age if isinstance(age, float) else None)
    yield make.of(_plain("aa_gradient", gas.aa_gradient_mmHg, gas, given))
    yield make.of(reading.aa_gradient_full_mmHg)
    yield make.of(reading.aa_gradient_expected_mmHg)


def _newest(key: str, ratio: RatioFigure) -> DerivedFigure:
    """The newest value of a ratio, as a figure."""
    caveats = () if ratio.caveat is None else (ratio.caveat,)
    reason = None if ratio.latest is not None else ratio.reasons.get("latest", Message("trend.no_values"))
    return DerivedFigure(key, ratio.latest, ratio.at, ratio.inputs, caveats=caveats, reason=reason)


def _named(name: str, ratio: RatioFigure, make: RowMaker) -> str:
    if ratio.latest is None:
        return make.tr("{name} not known").format(name=name)
    return f"{name} {value_text('pf', ratio.latest, make.reader)}"


# breathing


def _breathing_rows(f: EpisodeFigures, make: RowMaker) -> Iterator[FigureRow]:
    v = f.ventilation
    yield make.of(v.tidal_volume_mL)
    yield make.of(v.tidal_volume_mL_per_kg, make.tr("Tidal volume per kg of predicted weight"))
    yield make.of(v.minute_ventilation_L_per_min)
    yield make.of(v.alveolar_ventilation_L_per_min)
    yield make.of(v.minute_ventilation_at_gas_L_per_min, make.tr("Minute ventilation at the last gas"))
    yield make.of(v.minute_ventilation_for_usual_L_per_min, _wish_name(f, make), notes=_wished(f, make))
    yield make.of(v.ventilatory_ratio)
    yield make.of(v.rapid_shallow_breathing_index)
    yield make.of(v.predicted_body_weight_kg)


def _wish_name(f: EpisodeFigures, make: RowMaker) -> str:
    wish = f.ventilation.minute_ventilation_for_usual_L_per_min.inputs.get("wished_paco2")
    if wish is None or not isinstance(wish.value, float):
        return make.tr("Minute ventilation for the usual PaCO2")
    value = formats.gas_pressure(wish.value, make.reader.gas_unit)
    return make.tr("Minute ventilation for the usual PaCO2, {value}").format(value=value)


def _wished(f: EpisodeFigures, make: RowMaker) -> tuple[str, ...]:
    known = f.ventilation.minute_ventilation_for_usual_L_per_min.value is not None
    return (make.tr("Weak on a mask: never a setting"),) if known else ()


def _volume_word(f: EpisodeFigures, make: RowMaker) -> str:
    v = f.ventilation
    figures = (v.tidal_volume_mL, v.tidal_volume_mL_per_kg)
    parts = [value_text(x.key, x.value, make.reader) for x in figures if x.value is not None]
    if not parts:
        return make.tr("no tidal volume")
    given = v.tidal_volume_mL.inputs.get("vte")
    if given is not None and given.median_of is not None:
        parts[0] = make.tr("median {value}").format(value=parts[0])
    doubted = v.tidal_volume_mL.doubt is not None
    return ", ".join([*parts, make.tr("doubtful")] if doubted else parts)


def _mask_word(f: EpisodeFigures, make: RowMaker) -> str:
    parts = []
    if f.support.hours_on_mask is not None:
        parts.append(make.tr("{hours} on it").format(hours=formats.hours(f.support.hours_on_mask)))
    if f.leak.latest_L_per_min is not None:
        leak = formats.quantity("leak", f.leak.latest_L_per_min)
        if f.leak.latest_median_of is not None:
            leak = make.tr("median {value}").format(value=leak)
        parts.append(f"{input_name('leak', make.reader).lower()} {leak}")
    return ", ".join(parts)
