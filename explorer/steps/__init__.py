"""The pages, one for each step of the work.

Not called "pages": beside the start script, the page server would take a folder of that name for
the whole workbench and serve its files without the start script.
"""
