"""Pictures, plots, drawings, the report, the closing table and the result files: everything a user looks at.

Nothing here computes a figure that is reported; it only shows what it is handed. Pictures are rendered in a process of
their own (``pictures`` starts ``render``), so that a machine without a working graphics library loses its pictures and
nothing else.
"""
