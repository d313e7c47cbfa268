"""Envelope to feeds: kernels, renderer, final stage. Sample-numbered records in, samples out."""
