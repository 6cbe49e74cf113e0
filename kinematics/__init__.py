"""Kinematics of serial arms given by Denavit-Hartenberg tables: no HTTP, no files, no clocks."""
