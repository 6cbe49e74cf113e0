"""Steps from any earlier layout of the database to the present one, in ``versions``.

Left out: a configuration file and command line; ``migrate.py`` runs the steps over a connection.
"""
