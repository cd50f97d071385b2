"""The ground: deterministic models, vectorised over realisations. It knows no distribution."""
