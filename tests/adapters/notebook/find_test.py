# tests/adapters/notebook/find_test.py -- is the engine found in the order that the contract gives?
import os
import shutil
import tempfile
import unittest
from pathlib import Path

from support import PACKAGE, python

SHOW = "from countsel.find import find_engine\nfrom countsel import EngineMissing\n"


class Find(unittest.TestCase):
    def setUp(self):
        folder = tempfile.TemporaryDirectory()
        self.addCleanup(folder.cleanup)
        self.folder = Path(folder.name).resolve()
        # A package outside any checkout, as pip leaves it.
        shutil.copytree(PACKAGE / "countsel", self.folder / "site" / "countsel")

    def program(self, *parts):
        path = self.folder.joinpath(*parts)
        path.parent.mkdir(parents=True, exist_ok=True)
        path.write_text("#!/bin/sh\nexit 0\n")
        path.chmod(0o755)
        return str(path)

    def checkout(self, name):
        (self.folder / name / "adapters" / "notebook" / "countsel").mkdir(parents=True)
        (self.folder / name / "CMakePresets.json").write_text("{}")
        return self.program(name, "build", "release", "countsel")

    def found(self, call="find_engine()", cwd=None, site="site", **environment):
        code = SHOW + f"try: print({call})\nexcept EngineMissing as missing: print('MISSING', missing)"
        environment = {"COUNTSEL_ENGINE": None, "PATH": "/nowhere"} | environment
        done = python(code, cwd=cwd or self.folder, PYTHONPATH=str(self.folder / site), **environment)
        self.assertEqual(done.stderr, "")
        return done.stdout.strip()

    def test_the_path_given_comes_first(self):
        given, named = self.program("given"), self.program("named")
        self.assertEqual(self.found(f"find_engine({given!r})", COUNTSEL_ENGINE=named), given)

    def test_then_the_variable_then_the_checkout_then_path(self):
        named, built, on_path = self.program("named"), self.checkout("tree"), self.program("bin", "countsel")
        inside = Path(built).parents[2] / "deep" / "down"
        inside.mkdir(parents=True)
        path = str(Path(on_path).parent)
        self.assertEqual(self.found(cwd=inside, COUNTSEL_ENGINE=named, PATH=path), named)
        self.assertEqual(self.found(cwd=inside, PATH=path), built)
        self.assertEqual(self.found(cwd=inside, COUNTSEL_ENGINE="", PATH=path), built)
        self.assertEqual(self.found(PATH=path), on_path)

    def test_the_checkout_of_the_package_serves_where_one_stands_outside(self):
        built = self.checkout("tree")
        notebook = Path(built).parents[2] / "adapters" / "notebook"
        shutil.copytree(PACKAGE / "countsel", notebook / "countsel", dirs_exist_ok=True)
        self.assertEqual(self.found(cwd="/", site=notebook), built)

    def test_another_projects_build_is_no_engine(self):
        self.program("build", "release", "countsel")
        self.assertIn("MISSING", self.found())

    def test_what_is_named_must_be_there(self):
        self.checkout("tree")
        absent = str(self.folder / "absent")
        said = self.found(f"find_engine({absent!r})", cwd=self.folder / "tree")
        self.assertIn(f"There is no engine at {absent}, which the path given names.", said)
        said = self.found(cwd=self.folder / "tree", COUNTSEL_ENGINE=absent)
        self.assertIn(f"There is no engine at {absent}, which COUNTSEL_ENGINE names.", said)
        os.chmod(plain := self.program("plain"), 0o644)
        self.assertIn("not executable", self.found(COUNTSEL_ENGINE=plain))

    def test_nowhere_says_what_to_do(self):
        said = self.found()
        for part in ("MISSING", "cmake --preset release", "COUNTSEL_ENGINE", "PATH"):
            self.assertIn(part, said)


if __name__ == "__main__":
    unittest.main()
