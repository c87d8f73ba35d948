"""Pipe, liquid and fittings of a section file."""

from __future__ import annotations

from dataclasses import dataclass, replace

from fieldfit.errors import InputError
from fieldfit.field.quantities import measures, quantity, remarks, uncertain
from fieldfit.field.section import Fitting
from fieldfit.field.toml_table import TomlTable
from fieldfit.field.uncertain import Uncertain
from fieldfit.field.units import shown
from fieldfit.hydraulics.liquids import Liquid

BORE_LIMIT = "1 %"
"""Limit of a bore that nothing is said of."""
FITTING_LIMIT = "30 %"
"""Limit of a loss coefficient that nothing is said of."""
TEMPERATURE_LIMIT = "1 degC"
"""Limit of a temperature that nothing is said of."""
SMALLEST_BORE_M, LARGEST_BORE_M = 0.001, 20.0
"""A bore outside these is a slip of units [m]."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Pipe:
    """The pipe as laid."""

    bore: Uncertain
    """As-new inside diameter [m]."""
    source: str
    """Where the bore comes from."""
    material: str | None
    """Material, as the new-pipe table calls it; None when unknown."""


def read_pipe(top: TomlTable, said: list[str]) -> Pipe:
    """Return bore and material, from what is written or from the published size of the pipe.

    Parameters
    ----------
    top : TomlTable
        The section file.
    said : list of str
        Sentences on what was assumed are added here.

    Raises
    ------
    InputError
        When both or neither of bore and pipe are given, or one cannot be read.
    """
    bore_text, pipe_text = top.text("bore"), top.text("pipe")
    material = _material(top)
    if bore_text is not None and pipe_text is not None:
        advice = "Leave one of the two out; a measured bore is the better one."
        raise InputError("both bore and pipe are given", advice).at(top.where("pipe"))
    if pipe_text is not None:
        return _published_size(top, pipe_text, material, said)
    with top.at("bore"):
        bore = uncertain(bore_text or "", "length", "52.5 mm", BORE_LIMIT)
        check_bore(bore, bore_text or "")
    if bore.assumed:
        said.append(f'The bore was taken as good to ±{BORE_LIMIT}: write bore = "52.5 mm ± 0.2 mm" to change it.')
    return Pipe(bore=bore, source="given in the section file", material=material)


def check_bore(bore: Uncertain, text: str) -> None:
    """Refuse a bore that no pipe has, or of which nothing is known."""
    if bore.value <= 0.0:
        raise InputError(f"the bore '{shown(text)}' is not positive", "Write the inside diameter of the new pipe.")
    if not SMALLEST_BORE_M <= bore.value <= LARGEST_BORE_M:
        seen = f"the bore '{shown(text)}' is no pipe's"
        raise InputError(seen, f"Check its unit; it must lie between 1 mm and {LARGEST_BORE_M:g} m.")
    if bore.relative > 0.2:
        advice = "Measure the bore, or give its published size with pipe = ..."
        raise InputError(f"the bore '{shown(text)}' is known too badly to say anything of the wall", advice)


def _published_size(top: TomlTable, text: str, material: str | None, said: list[str]) -> Pipe:
    """Return bore and material of a published pipe size."""
    from fieldfit.hydraulics.pipe_sizes import pipe_size

    with top.at("pipe"):
        size = pipe_size(text)
    if "material" not in top.values and size.material:
        material = size.material
        said.append(f'The material was taken from the pipe size as {material}: write material = "..." to change it.')
    bore = Uncertain(value=size.bore_m, standard=size.bore_standard_m)
    return Pipe(bore=bore, source=f"{size.name}, {size.source}", material=material)


def _material(top: TomlTable) -> str | None:
    """Return the material's name in the new-pipe table; None when unknown."""
    from fieldfit.hydraulics.materials import material

    text = top.text("material")
    if text is None or text.casefold() == "unknown":
        return None
    with top.at("material"):
        return material(text).name


def read_liquid(top: TomlTable, said: list[str]) -> Liquid:
    """Return what flows: water, a liquid from a library, or a density–viscosity pair.

    Parameters
    ----------
    top : TomlTable
        The section file.
    said : list of str
        Sentences on what was assumed are added here.

    Raises
    ------
    InputError
        When the liquid is not known, or its pair cannot be read.
    """
    from fieldfit.hydraulics.liquids import from_library, water

    if isinstance(top.values.get("fluid"), dict):
        return _pair(top)
    text = top.text("fluid")
    if text is None:
        said.append('The liquid was taken as water: write fluid = "..." to change it.')
    if text is None or text.casefold() == "water":
        return water()
    with top.at("fluid"):
        return from_library(text)


def _pair(top: TomlTable) -> Liquid:
    """Return a liquid from density and viscosity, dynamic or kinematic by its unit."""
    from fieldfit.hydraulics.liquids import fixed_pair

    table = top.table("fluid")
    assert table is not None  # the caller looked
    name, density_text, viscosity_text = (
        table.text("name") or "liquid",
        table.needed("density"),
        table.needed("viscosity"),
    )
    with table.at("density"):
        density = quantity(density_text, "density", "870 kg/m3")
    with table.at("viscosity"):
        dynamic = measures(viscosity_text, "dynamic viscosity")
        viscosity = uncertain(viscosity_text, "dynamic viscosity" if dynamic else "kinematic viscosity", "32 cSt", "0")
    with top.at("fluid"):
        if dynamic:
            liquid = fixed_pair(name, density, dynamic_pa_s=viscosity.value)
        else:
            liquid = fixed_pair(name, density, kinematic_m2_s=viscosity.value)
    return liquid if viscosity.assumed else replace(liquid, viscosity_standard=viscosity.relative)


def read_temperature(top: TomlTable, said: list[str]) -> tuple[Uncertain | None, float]:
    """Return the liquid's temperature [°C], None when not given, and its standard uncertainty [K] in any case.

    Parameters
    ----------
    top : TomlTable
        The section file.
    said : list of str
        Sentences on what was assumed are added here.

    Raises
    ------
    InputError
        When it cannot be read.
    """
    text = top.text("temperature")
    with top.at("temperature"):
        # Without a temperature here the limit still holds for the log's column, so any value serves to read it.
        given = uncertain(text or "15 degC", "temperature", "18 degC", TEMPERATURE_LIMIT)
    if given.assumed and not isinstance(top.values.get("fluid"), dict):
        example = 'write temperature = "18 degC ± 0.5 degC" to change it.'
        said.append(f"The liquid's temperature was taken as good to ±{TEMPERATURE_LIMIT}: {example}")
    return (given if text is not None else None), given.standard


def read_fittings(tables: tuple[TomlTable, ...], bore_m: float, said: list[str]) -> tuple[Fitting, ...]:
    """Return the fittings between the taps.

    Parameters
    ----------
    tables : tuple of TomlTable
        The `[[fitting]]` tables.
    bore_m : float
        Bore [m], which some published coefficients depend on.
    said : list of str
        Sentences on what was assumed are added here.

    Raises
    ------
    InputError
        When both or neither of k and kind are given, or one cannot be read.
    """
    fittings = tuple(_fitting(table, bore_m) for table in tables)
    bare = dict.fromkeys(fitting.name for fitting in fittings if fitting.k.assumed)
    if bare:
        example = 'write k = "0.5 ± 20 %" to change it.'
        said.append(f"K of {', '.join(bare)} was taken as good to ±{FITTING_LIMIT}: {example}")
    return fittings


def _fitting(table: TomlTable, bore_m: float) -> Fitting:
    """Return one fitting."""
    k_text, kind, station_text = table.number_or_text("k"), table.text("kind"), table.text("station")
    if (k_text is None) == (kind is None):
        seen = "neither k nor kind is given" if kind is None else "both k and kind are given"
        advice = 'Write either k = 0.5 or the fitting\'s kind, such as kind = "gate valve, open".'
        raise InputError(seen, advice).at(table.where("k"))
    station = None
    if station_text is not None:
        with table.at("station"):
            station = quantity(station_text, "length", "12 m")
    name = table.text("name") or kind or "fitting"
    k, source = _coefficient(table, k_text, kind, bore_m)
    return Fitting(name=name, k=k, count=table.count("count"), station=station, source=source)


def _coefficient(table: TomlTable, k_text: str | None, kind: str | None, bore_m: float) -> tuple[Uncertain, str]:
    """Return a loss coefficient and where it comes from."""
    from fieldfit.hydraulics.fitting_losses import fitting_k

    if kind is not None:
        with table.at("kind"):
            loss = fitting_k(kind, bore_m)
        k = Uncertain(value=loss.k, standard=loss.k * loss.relative_standard, assumed=True)
        return k, loss.source
    with table.at("k"):
        k = uncertain(k_text or "", "ratio", "0.5", FITTING_LIMIT)
        if k.value < 0.0 or k.value > 1e5:
            advice = "Write the loss coefficient of one fitting, from 0 up."
            raise InputError(f"K is {shown(k_text or '')}, which no fitting has", advice)
    return k, "given in the section file"


def read_duty(table: TomlTable | None, said: list[str]) -> float | None:
    """Return the flow the pipe must carry [m³/s], or None.

    Parameters
    ----------
    table : TomlTable or None
        The `[duty]` table.
    said : list of str
        Sentences on what was assumed are added here.

    Raises
    ------
    InputError
        When it cannot be read or is not positive.
    """
    if table is None:
        return None
    text = table.needed("flow")
    with table.at("flow"):
        flow = quantity(text, "flow", "3.0 L/s")
        if flow <= 0.0:
            raise InputError(f"the duty '{shown(text)}' is not positive", "Write the flow the pipe must carry.")
    said += remarks(text, "flow")
    return flow
