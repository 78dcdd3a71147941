"""Before walking: what each line of a survey can show in the expected conditions."""

from cladwatt.inverse.draws import DrawBook
from cladwatt.inverse.plan import LinePlan, Viewpoint, plan_line
from cladwatt.results.assessment import Settings
from cladwatt.survey.model import Conditions
from cladwatt.survey.survey import Survey

__all__ = ["plan_survey"]


def plan_survey(
    survey: Survey, *, settings: Settings | None = None, view: Viewpoint | None = None
) -> tuple[LinePlan, ...]:
    """Tell what each line can show, in the order of the line list.

    Parameters
    ----------
    survey : Survey
        With or without frames, see `read_survey`.
    settings : Settings, optional
        Seed and number of draws.
    view : Viewpoint, optional
        Where frames will be taken from.

    Returns
    -------
    tuple of LinePlan
        In the conditions of the first frame a line is drawn on, else in those of the whole survey.
    """
    from threadpoolctl import threadpool_limits

    settings = settings or Settings()
    with threadpool_limits(limits=1, user_api="blas"):
        return tuple(
            plan_line(
                line,
                _expected(survey, tag),
                survey.camera,
                survey.site,
                DrawBook(settings.seed, settings.draws),
                defaults=survey.defaults,
                convection_model=survey.convection_model,
                view=view,
            )
            for tag, line in survey.lines.items()
        )


def _expected(survey: Survey, tag: str) -> Conditions:
    for region in survey.regions:
        if region.tag == tag and region.role == "pipe":
            return survey.frame(region.frame_id).conditions
    return survey.conditions
