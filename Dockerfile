# syntax=docker/dockerfile:1
# Two stages: the first has the compiler that SQLite's binding needs, the second only what runs.
FROM node:20-bookworm-slim AS build
RUN apt-get update \
 && apt-get install --no-install-recommends -y python3 make g++ \
 && rm -rf /var/lib/apt/lists/*
WORKDIR /app
COPY package.json package-lock.json ./
RUN npm ci --no-audit --no-fund
COPY tsconfig.json ./
COPY src ./src
COPY config ./config
RUN npm run build && npm prune --omit=dev --no-audit --no-fund

FROM node:20-bookworm-slim
LABEL org.opencontainers.image.title="rimehold" \
      org.opencontainers.image.description="Monitors and schedules a small stored-ice cooling plant over MQTT" \
      org.opencontainers.image.licenses="MIT"
ENV NODE_ENV=production
WORKDIR /app
COPY --from=build --chown=root:root /app/package.json ./package.json
COPY --from=build --chown=root:root /app/node_modules ./node_modules
COPY --from=build --chown=root:root /app/dist ./dist
COPY --from=build --chown=root:root /app/config ./config
RUN mkdir -p /data /site && chown node:node /data
USER node
WORKDIR /data
VOLUME /data
EXPOSE 8377
STOPSIGNAL SIGTERM
HEALTHCHECK --interval=60s --timeout=5s --start-period=20s \
  CMD ["node", "-e", "fetch('http://127.0.0.1:8377/health').then((r) => process.exit(r.ok ? 0 : 1), () => process.exit(1))"]
ENTRYPOINT ["node", "/app/dist/cli.js"]
CMD ["run", "--config", "/site/site.yaml"]
