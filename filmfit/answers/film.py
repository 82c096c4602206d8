"""The fitted run's quantities: those of the main layer, and every layer with its law.

Knows which answer is asked of which layer; does not judge.
"""

from filmfit.answers.carriers import carriers
from filmfit.answers.gap import gaps
from filmfit.answers.thickness import Found, index_550, rate, thickness
from filmfit.fit.build import Built
from filmfit.fit.interval import Posterior
from filmfit.materials import Expectation
from filmfit.result import Layer, Quantity, Results
from filmfit.runfile.load import RunFile
from filmfit.units import HC_EV_NM


def main_results(file: RunFile, built: Built, posterior: Posterior, main: int, mass: Expectation | None) -> Results:
    """Return the quantities of the main layer."""
    found = Found(posterior, posterior.solution.problem.runs[0].layers[main])
    keys = file.content.layer[main]
    depth = thickness(found)
    coated = [scan for scan in posterior.solution.problem.runs[0].scans if scan.coated]
    shortest = min(float(scan.wavelength_nm[0]) for scan in coated)
    longest = max(float(scan.wavelength_nm[-1]) for scan in coated)
    return Results(
        thickness_nm=depth,
        top_nm=_top(posterior),
        roughness_nm=None if found.layer.rough is None else posterior.parameter(found.layer.rough),
        index_550=index_550(found) if shortest <= 550 <= longest else None,
        rate_nm_min=rate(depth, keys.time_s or file.content.run.time_s) if keys.deposited else None,
        **gaps(found, HC_EV_NM / longest, HC_EV_NM / shortest),
        **carriers(found, mass),
    )


def _top(posterior: Posterior) -> Quantity | None:
    """Return the distance from the plate to the outer surface in nm, all layers together."""
    layers = posterior.solution.problem.runs[0].layers
    return posterior.positive(lambda values: float(sum(layer.top_nm(values) for layer in layers)))


def effective_mass(file: RunFile, built: Built) -> Expectation | None:
    """Return the effective mass that the run file or the main layer's material states."""
    stated, source = file.content.electrical, built.starting[0]
    library = source.effective_mass if source is not None else None
    if stated.effective_mass is None:
        return library
    sigma = stated.effective_mass_sigma
    if sigma is None:
        sigma = library.sigma if library is not None else 0.0
    return Expectation(stated.effective_mass, sigma, "run file")


def all_layers(file: RunFile, posterior: Posterior) -> tuple[Layer, ...]:
    """Return every layer with its thickness, rate, law and parameters."""
    layers = []
    for keys, model in zip(file.content.layer, posterior.solution.problem.runs[0].layers, strict=True):
        found = Found(posterior, model)
        depth = thickness(found)
        parameters: dict[str, Quantity] = {}
        if model.dispersion is not None:
            for name, index in zip(model.dispersion.names, model.laws, strict=True):
                if not name.startswith("correction."):
                    parameters[name] = posterior.parameter(int(index))
        laws = [name.partition(".")[0] for name in parameters]
        parameters |= {name: posterior.parameter(index) for name, index in model.structure.items()}
        time_s = keys.time_s or file.content.run.time_s
        layers.append(
            Layer(
                name=keys.name,
                thickness_nm=depth,
                rate_nm_min=rate(depth, time_s) if keys.deposited else None,
                law=" + ".join(dict.fromkeys(laws)) or (keys.material or ""),
                parameters=parameters,
            )
        )
    return tuple(layers)
