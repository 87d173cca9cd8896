"""A case's calculation as a whole: results named, computed twice, judged against limits.

Nothing is shown here. A template shows an assessment through ``reportgen.sheet``;
comparison and tolerance studies use it without a notebook.
"""
