import type { FastifyHelmetOptions } from '@fastify/helmet';

/**
 * What a browser may do with anything we send: the page's own files and nothing from elsewhere, no
 * script or style written into it, in no frame.
 */
export const securityHeaders: FastifyHelmetOptions = {
  contentSecurityPolicy: {
    useDefaults: false,
    directives: {
      defaultSrc: ["'none'"],
      scriptSrc: ["'self'"],
      styleSrc: ["'self'"],
      imgSrc: ["'self'", 'data:'],
      fontSrc: ["'self'"],
      connectSrc: ["'self'"],
      manifestSrc: ["'self'"],
      baseUri: ["'none'"],
      formAction: ["'self'"],
      frameAncestors: ["'none'"],
    },
  },
  // Whether the address is reached by TLS is known to what stands in front of us alone.
  strictTransportSecurity: false,
  xFrameOptions: { action: 'deny' },
  referrerPolicy: { policy: 'no-referrer' },
};
