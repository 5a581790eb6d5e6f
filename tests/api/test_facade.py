"""The public names: a list that changes on purpose only."""

from __future__ import annotations

import importlib
import importlib.metadata
from types import ModuleType

import pytest

import springpoise

CLASSES = {
    "springpoise.linkages": {
        "Arm",
        "Body",
        "FiveBar",
        "FourBar",
        "Link",
        "PlanarChain",
        "PlanarLinkage",
        "Point",
        "SpatialChain",
    },
    "springpoise.springs": {
        "CompressionSpring",
        "ConstantForceSpring",
        "ExtensionSpring",
        "GasSpring",
        "MeasuredSpring",
        "RubberTube",
        "TorsionSpring",
        "ZeroLengthSpring",
        "in_parallel",
        "in_series",
    },
    "springpoise.paths": {"Cable", "Disc", "JointTravel", "Spool", "Straight"},
    "springpoise.mechanism": {"Friction", "Mechanism", "SpringMount"},
    "springpoise.feedforward": {"Actuator", "Feedforward", "Motor"},
}
CONSTANTS = {"STANDARD_GRAVITY", "__version__"}
SUBMODULES = {"balance", "gravity", "guard", "linkages", "paths", "springs", "tolerance", "units"}


def test_the_list_of_public_names() -> None:
    expected = set().union(*CLASSES.values()) | CONSTANTS | SUBMODULES
    assert set(springpoise.__all__) == expected
    assert len(springpoise.__all__) == len(expected)
    assert dir(springpoise) == sorted(expected)


@pytest.mark.parametrize("name", sorted(springpoise.__all__))
def test_every_name_resolves_and_stays(name: str) -> None:
    value = getattr(springpoise, name)
    assert value is getattr(springpoise, name)
    if name in SUBMODULES:
        assert isinstance(value, ModuleType)
        assert value.__name__ == f"springpoise.{name}"


@pytest.mark.parametrize(("home", "name"), sorted((home, name) for home, names in CLASSES.items() for name in names))
def test_every_class_is_public_in_its_home_too(home: str, name: str) -> None:
    module = importlib.import_module(home)
    assert getattr(module, name) is getattr(springpoise, name)
    assert name in module.__all__


def test_the_version_is_that_of_the_distribution() -> None:
    assert springpoise.__version__ == importlib.metadata.version("springpoise")


@pytest.mark.parametrize("name", ["Amr", "SpatialChian", "_HOMES", "numpy"])
def test_an_unknown_name(name: str) -> None:
    with pytest.raises(AttributeError, match=rf"module 'springpoise' has no attribute '{name}'"):
        getattr(springpoise, name)
