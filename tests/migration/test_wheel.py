"""What ships: the wheel holds the migrations and the templates, and works from where it lies."""

import os
import subprocess
import sys
import zipfile
from pathlib import Path

import pytest

ROOT = Path(__file__).parents[2]
PACKAGE = ROOT / "service" / "vanner"

_USE = """
import sys
from pathlib import Path
import vanner
from vanner.store.database import Database
from vanner.store.migrate import migrations_folder
print(Path(vanner.__file__).parent)
print(migrations_folder())
Database.open(Path(sys.argv[1])).close()
"""


@pytest.fixture(scope="module")
def wheel(tmp_path_factory):
    folder = tmp_path_factory.mktemp("wheel")
    subprocess.run(
        [sys.executable, "-m", "build", "--wheel", "--no-isolation", "--outdir", folder, ROOT],
        check=True,
        capture_output=True,
    )
    (path,) = folder.glob("vanner-*.whl")
    return path


def names(wheel):
    with zipfile.ZipFile(wheel) as archive:
        return set(archive.namelist())


@pytest.mark.slow
def test_the_wheel_carries_every_migration(wheel):
    expected = {
        f"vanner/migrations/{path.relative_to(ROOT / 'migrations').as_posix()}"
        for path in (ROOT / "migrations").rglob("*.py")
    }
    assert "vanner/migrations/versions/0001_first.py" in expected
    assert expected <= names(wheel)


@pytest.mark.slow
def test_the_wheel_carries_every_template_and_the_type_marker(wheel):
    expected = {f"vanner/{path.relative_to(PACKAGE).as_posix()}" for path in PACKAGE.rglob("*.j2")}
    assert {name.split("/")[1] for name in expected} == {"alerts", "digests"}
    assert expected | {"vanner/py.typed"} <= names(wheel)


@pytest.mark.slow
def test_the_wheel_carries_nothing_but_the_package(wheel):
    others = {name for name in names(wheel) if not name.startswith("vanner/")}
    assert all(name.partition("/")[0].endswith(".dist-info") for name in others)
    assert not [name for name in names(wheel) if "__pycache__" in name or name.endswith(".db")]


@pytest.mark.slow
def test_an_unpacked_wheel_makes_a_database_by_its_own_migrations(wheel, tmp_path):
    place = tmp_path / "site"
    with zipfile.ZipFile(wheel) as archive:
        archive.extractall(place)
    done = subprocess.run(
        [sys.executable, "-c", _USE, tmp_path / "vanner.db"],
        env=os.environ | {"PYTHONPATH": str(place)},
        cwd=tmp_path,
        check=True,
        capture_output=True,
        text=True,
    )
    assert done.stdout.splitlines() == [
        str(place / "vanner"),
        str(place / "vanner" / "migrations"),
    ]
    assert (tmp_path / "vanner.db").stat().st_size > 0
