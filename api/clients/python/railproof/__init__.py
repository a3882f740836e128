"""Client of railproof, the worst-case proof of step-down supply rails.

    from railproof import Client

    client = Client("http://127.0.0.1:8080")
    answer = client.losses(request)                      # typed as the contract has it
    client.picture("steady_state", request)              # shows itself in a notebook
    answer = client.submit("corners", request).wait()    # long work, with its progress
"""

from .client import Client, NoAnswerError
from .job import JobNotDoneError, RunningJob
from .problem import ProblemError
from .shown import Page, Picture

__all__ = ["Client", "JobNotDoneError", "NoAnswerError", "Page", "Picture", "ProblemError", "RunningJob"]
