"""The report on a kept roof: content.py says what stands in it, page.py and paper.py how it looks."""
