const path = require('node:path');
const { getDefaultConfig } = require('expo/metro-config');

const root = __dirname;
const config = getDefaultConfig(root);

config.resolver.assetExts.push('woff2');

// Anchored to the project root: packages have folders of the same names. server/contract is shared with the client.
const escapedRoot = root.replace(/[/\\^$.*+?()[\]{}|-]/g, '\\$&');
const blocked = [
  'server/(?!contract(?:/|$))',
  'db/',
  'drizzle/',
  'tests/',
  'fixtures/',
  'dist/',
  'docs/',
  '\\.gustbook/',
  'workers/node/',
];
const existing = config.resolver.blockList;
config.resolver.blockList = [
  ...(Array.isArray(existing) ? existing : existing ? [existing] : []),
  ...blocked.map((folder) => new RegExp(`^${escapedRoot}/${folder}.*`)),
];

// Metro keeps every module that is named anywhere. These are named by their packages and used by nobody here: zod's languages (only English
// messages are shown, and those it carries itself), its compiler and its reader of JSON schemas, SVG from text, and lists that scroll by
// themselves.
const unused = [
  { from: 'zod', names: /\/(locales\/index|compile|from-json-schema)\.js$/ },
  { from: 'react-native-svg', names: /^\.\/xml$/ },
  {
    from: 'react-native-web',
    names: /\/(exports\/(FlatList|SectionList|VirtualizedList)|components\/Animated(FlatList|SectionList))$/,
  },
];
config.resolver.resolveRequest = (context, moduleName, platform) => {
  const { originModulePath } = context;
  const isUnused = unused.some(
    ({ from, names }) =>
      originModulePath.includes(`${path.sep}node_modules${path.sep}${from}${path.sep}`) &&
      names.test(moduleName),
  );
  return isUnused ? { type: 'empty' } : context.resolveRequest(context, moduleName, platform);
};

// In development the page comes from Metro and the data from the server beside it.
const apiPort = Number(process.env.PORT ?? 8700);
config.server.enhanceMiddleware = (metro) => (request, response, next) => {
  if (!request.url?.startsWith('/api/')) return metro(request, response, next);
  const http = require('node:http');
  const upstream = http.request(
    {
      host: '127.0.0.1',
      port: apiPort,
      path: request.url,
      method: request.method,
      headers: { ...request.headers, host: `127.0.0.1:${apiPort}` },
    },
    (answer) => {
      response.writeHead(answer.statusCode ?? 502, answer.headers);
      answer.pipe(response);
    },
  );
  upstream.on('error', () => {
    response.writeHead(503, { 'content-type': 'application/json' });
    response.end(
      JSON.stringify({
        error: {
          code: 'unavailable',
          message: 'The server is not running yet. Start it, then try again.',
          requestId: 'metro',
        },
      }),
    );
  });
  request.pipe(upstream);
};

module.exports = config;
