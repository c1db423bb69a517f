// The validator of the viewer would send the document to an outside host.
SwaggerUIBundle({
  url: "/openapi.json",
  dom_id: "#reference",
  deepLinking: true,
  validatorUrl: null,
});
