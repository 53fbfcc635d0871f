"""Shipped files: in a checkout, in an installed package, and never someone else's."""

from __future__ import annotations

import pytest

from screener.files import shipped


@pytest.fixture
def package(tmp_path, monkeypatch):
    package = tmp_path / "screener"
    for place in (tmp_path, package / "_shipped"):
        (place / "catalogs").mkdir(parents=True)
        (place / "catalogs" / "a.json").write_text("{}")
    monkeypatch.setattr(shipped, "_PACKAGE", package)
    return package


def test_a_checkout_comes_first(package):
    (package.parent / "pyproject.toml").write_text("")
    assert shipped.path("catalogs", "a.json") == package.parent / "catalogs" / "a.json"


def test_an_installed_package_uses_its_own_and_not_a_neighbour_of_the_same_name(package):
    assert shipped.path("catalogs", "a.json") == package / "_shipped" / "catalogs" / "a.json"


def test_what_the_checkout_lacks_is_sought_in_the_package(package):
    (package.parent / "pyproject.toml").write_text("")
    assert shipped.path("none.json") == package / "_shipped" / "none.json"


def test_the_package_is_the_folder_above_this_one():
    assert shipped._PACKAGE.name == "screener"
    assert (shipped._PACKAGE / "errors.py").is_file()


def test_hash_of_a_file(tmp_path):
    # [V] FIPS 180-2 (2002), appendix B.1: SHA-256 of "abc"
    (tmp_path / "a").write_bytes(b"abc")
    expected = "ba7816bf8f01cfea414140de5dae2223b00361a396177a9cb410ff61f20015ad"
    assert shipped.sha256(tmp_path / "a") == expected
