"""Tests of chainsim."""
