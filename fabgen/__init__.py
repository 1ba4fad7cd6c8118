"""fabgen: from a frequency, a dish and stock on the shelf to the workshop pack of a loop feed."""

__version__ = "0.1.0"
