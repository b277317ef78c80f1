# tests/adapters/notebook/kernel_test.py -- does it work in a real notebook kernel, as a page would show it?
import asyncio
import os
import unittest
import warnings

from support import ENGINE, FAKE, HERE, PACKAGE

with warnings.catch_warnings():
    warnings.simplefilter("ignore")  # of the kernel's own packages
    import nbclient
    import nbformat


class Kernel(unittest.TestCase):
    """Each test is a notebook of its own; a cell's outputs are what would be saved in the file."""

    def run_cells(self, *cells, engine=ENGINE, interrupt=None):
        os.environ |= {
            "COUNTSEL_ENGINE": engine,
            "PYTHONPATH": f"{PACKAGE}:{HERE}",
            "PYDEVD_DISABLE_FILE_VALIDATION": "1",
        }
        notebook = nbformat.v4.new_notebook(cells=[nbformat.v4.new_code_cell(cell) for cell in cells])
        client = nbclient.NotebookClient(notebook, timeout=60, kernel_name="python3", allow_errors=True)
        with warnings.catch_warnings():
            warnings.simplefilter("ignore")
            if interrupt is not None:
                asyncio.run(self.stop_during(client, interrupt))
            else:
                client.execute()
        return [cell["outputs"] for cell in notebook.cells]

    async def stop_during(self, client, index):
        """Presses the stop button 1 s into the cell `index`."""
        running = asyncio.ensure_future(client.async_execute())
        while len(client.nb.cells[index]["outputs"]) == 0:
            await asyncio.sleep(0.05)
            if running.done():
                break
        await client.km.interrupt_kernel()
        await running

    def setUp(self):
        before = dict(os.environ)
        self.addCleanup(lambda: (os.environ.clear(), os.environ.update(before)))

    def test_an_answer_is_shown_as_a_page(self):
        ask = "countsel.how_often(count=[3, 0], exposure=[1200, 800], label=['<b>north', 'south'], per=1000)"
        (shown,) = self.run_cells(f"import countsel\n{ask}")
        html = shown[0]["data"]["text/html"]
        for part in ("<table", "&lt;b&gt;north", "south", "Garwood"):
            self.assertIn(part, html)
        self.assertNotIn("<b>north", html)
        self.assertIn("countsel.Answer", shown[0]["data"]["text/plain"])

    def test_progress_is_one_bar_that_moves(self):
        (shown,) = self.run_cells("import countsel\nprint(countsel.linger(turns=5, progress=True))", engine=FAKE)
        bars = [output["data"]["text/html"] for output in shown if output["output_type"] == "display_data"]
        self.assertEqual(len(bars), 1)
        self.assertIn("80% lingering", bars[0])

    def test_the_stop_button_cancels_and_the_engine_stays(self):
        _, stopped, after = self.run_cells(
            "import countsel\nbefore = countsel.echo(pips=1).more['pid']",
            "print('started', flush=True)\ncountsel.linger()",
            "print(countsel.echo(pips=1).more['pid'] == before)",
            engine=FAKE,
            interrupt=1,
        )
        self.assertEqual(stopped[-1]["ename"], "KeyboardInterrupt")
        self.assertEqual(after[0]["text"].strip(), "True")

    def test_a_refusal_and_a_death_are_readable(self):
        _, refused, died, after = self.run_cells(
            "import countsel",
            "countsel.how_often(count=[3, -2])",
            "import os, signal\nos.kill(countsel.shared.engine().pid, signal.SIGKILL)\ncountsel.how_often(count=3)",
            "print(countsel.how_often(count=3).figures['count'])",
        )
        self.assertEqual(refused[0]["ename"], "Refused")
        self.assertIn("Row 2 of count is -2", refused[0]["evalue"])
        # Whether the kill is seen before the question is sent is chance: then it is only warned of.
        self.assertTrue({"EngineDied"} & {output.get("ename") for output in died} or "started again" in str(died))
        self.assertEqual(after[0]["text"].strip(), "3")


if __name__ == "__main__":
    unittest.main()
