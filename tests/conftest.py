"""Settings of the property tests: the same examples on every run, no clock, no database."""

from hypothesis import HealthCheck, Phase, settings

settings.register_profile(
    "fixed",
    derandomize=True,
    deadline=None,
    database=None,
    phases=[Phase.explicit, Phase.generate, Phase.shrink],
    suppress_health_check=[HealthCheck.too_slow],
)
settings.load_profile("fixed")
