# The steps of README.md in an image: arms are kept in the volume, no one but the service runs.
FROM python:3.12-slim

WORKDIR /opt/armspan
COPY pyproject.toml README.md LICENSE ./
COPY kinematics kinematics
COPY service service
COPY openapi_examples openapi_examples
RUN python3 -m venv .venv && .venv/bin/pip install -q .
RUN .venv/bin/python -m compileall -q .venv && rm -rf kinematics service openapi_examples

ENV ARMSPAN_HOST=0.0.0.0 \
    ARMSPAN_PORT=8017 \
    ARMSPAN_DATABASE=/var/lib/armspan/arms.db \
    NUMBA_CACHE_DIR=/var/cache/armspan \
    PYTHONUNBUFFERED=1
RUN useradd --system --no-create-home armspan \
    && install -d -o armspan -g armspan /var/lib/armspan /var/cache/armspan
USER armspan
# Compiled as the user that runs it, or it would be compiled at every start.
RUN .venv/bin/python -c "from kinematics.warm_up import warm_up; warm_up()"

VOLUME /var/lib/armspan
EXPOSE 8017
HEALTHCHECK --interval=30s --timeout=3s --start-period=20s \
    CMD [".venv/bin/python", "-c", "import os, urllib.request; urllib.request.urlopen('http://127.0.0.1:' + os.environ['ARMSPAN_PORT'] + '/v1/ping', timeout=2)"]
ENTRYPOINT [".venv/bin/armspan"]
CMD ["serve"]
