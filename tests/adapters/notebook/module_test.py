# tests/adapters/notebook/module_test.py -- does the module serve with an engine, without one, without pandas?
import re
import unittest

from support import ENGINE, FAKE, ROOT, python

NO_PANDAS = "import sys; sys.modules['pandas'] = sys.modules['numpy'] = None\n"


class Case(unittest.TestCase):
    def run_code(self, code, **environment):
        done = python(code, cwd="/", **environment)
        self.assertEqual((done.returncode, done.stderr), (0, ""), done.stderr)
        return done.stdout.strip()


class Import(Case):
    def test_functions_are_made_at_import_from_the_catalogue(self):
        code = "import countsel as c; print([name in vars(c) for name in ('echo', 'how_often')], c.__all__[-1])"
        self.assertEqual(self.run_code(code, COUNTSEL_ENGINE=FAKE), "[True, False] held")

    def test_one_engine_is_shared(self):
        code = "import countsel; print(len({countsel.echo(pips=1).more['pid'] for _ in range(3)}))"
        self.assertEqual(self.run_code(code, COUNTSEL_ENGINE=FAKE), "1")

    def test_held_tables_serve_the_modules_functions(self):
        code = """
import countsel
table = countsel.hold({"n": ["1"]})
print(countsel.echo(table, pips="n").more["request"]["of"], countsel.release(table).say)
"""
        said = "{'held': 'table_1', 'roles': {'pips': 'n'}} release"
        self.assertEqual(self.run_code(code, COUNTSEL_ENGINE=FAKE), said)

    def test_a_table_of_another_engine_is_not_mistaken(self):
        code = f"""
import countsel
table = countsel.Engine({FAKE!r}).hold({{"n": ["1"]}})
try: countsel.echo(table, pips="n")
except countsel.Refused as refused: print(refused)
"""
        self.assertIn("held by another engine", self.run_code(code, COUNTSEL_ENGINE=FAKE))

    def test_an_unknown_name_gets_the_nearest(self):
        code = """
import countsel
try: countsel.ecko
except AttributeError as error: print(error)
print(hasattr(countsel, "_nothing"))
"""
        said = self.run_code(code, COUNTSEL_ENGINE=FAKE)
        self.assertEqual(said, "module 'countsel' has no attribute 'ecko'; did you mean echo?\nFalse")

    def test_importing_it_does_not_import_pandas(self):
        code = "import sys, countsel; print(countsel.echo(pips=[1]).say, {'pandas', 'numpy'} & set(sys.modules))"
        self.assertEqual(self.run_code(code, COUNTSEL_ENGINE=FAKE), "echo set()")


class Missing(Case):
    def test_the_import_works_and_the_first_use_says_what_is_missing(self):
        code = """
import countsel
print(countsel.Answer.__name__, hasattr(countsel, "__wrapped__"))
for use in (lambda: countsel.how_often(count=3), lambda: countsel.Engine()):
    try: use()
    except countsel.EngineMissing as missing: print(missing)
try: from countsel import how_often
except countsel.EngineMissing as missing: print("import:", missing)
"""
        said = self.run_code(code, COUNTSEL_ENGINE="/nowhere/countsel").splitlines()
        self.assertEqual(said[0], "Answer False")
        self.assertEqual(said[1:3], ["There is no engine at /nowhere/countsel, which COUNTSEL_ENGINE names."] * 2)
        self.assertTrue(said[3].startswith("import: There is no engine"))

    def test_an_engine_that_appears_later_is_found(self):
        code = f"import countsel, os; os.environ['COUNTSEL_ENGINE'] = {FAKE!r}; print(countsel.echo(pips=1).say)"
        self.assertEqual(self.run_code(code, COUNTSEL_ENGINE="/nowhere/countsel"), "echo")

    def test_what_is_no_engine_does_not_break_the_import(self):
        code = """
import countsel
try: countsel.how_often
except countsel.EngineTrouble as trouble: print(trouble)
"""
        self.assertIn("exit code 0", self.run_code(code, COUNTSEL_ENGINE="/bin/true"))


class Plain(Case):
    def test_without_pandas_and_numpy(self):
        code = (
            NO_PANDAS
            + """
import countsel
mains = {"n": [3, 0], "km": [1200, 800], "zone": ["a", None]}
answer = countsel.how_often(mains, count="n", exposure="km", label="zone")
table = answer.tables["rates"]
print(type(table).__name__, table["count"], answer.figures["count"], "<table" in answer._repr_html_())
"""
        )
        self.assertEqual(self.run_code(code, COUNTSEL_ENGINE=ENGINE), "dict [3, 0] 3 True")


class Versions(unittest.TestCase):
    def test_the_package_has_the_projects_version(self):
        from countsel import __version__

        project = re.search(r"project\(countsel VERSION ([\d.]+)", (ROOT / "CMakeLists.txt").read_text())[1]
        self.assertEqual(__version__, project)


if __name__ == "__main__":
    unittest.main()
