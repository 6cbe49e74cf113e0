// Starts the documentation page; no validator badge, which would ask a host outside the plant.
window.SwaggerUIBundle({
  url: "/openapi.json",
  dom_id: "#addresses",
  deepLinking: true,
  validatorUrl: null,
});
