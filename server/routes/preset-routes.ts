import { addPresetVersion, createPreset, getPreset, listPresets } from '../domain/presets';
import { type GroupRoute, param, smallBody } from './group-route';

export const presetRoutes: readonly GroupRoute[] = [
  {
    method: 'get',
    path: '/presets',
    action: 'presets.read',
    async handle({ presets }, member, _request, response) {
      response.json({ presets: await listPresets(presets, member) });
    },
  },
  {
    method: 'post',
    path: '/presets',
    action: 'presets.write',
    bodyLimit: smallBody,
    async handle({ presets }, member, request, response) {
      response.status(201).json(await createPreset(presets, member, request.body));
    },
  },
  {
    method: 'get',
    path: '/presets/:id',
    action: 'presets.read',
    async handle({ presets }, member, request, response) {
      const version = request.query.version;
      const wanted = version === undefined ? null : String(version);
      response.json(await getPreset(presets, member, param(request, 'id'), wanted));
    },
  },
  {
    method: 'post',
    path: '/presets/:id',
    action: 'presets.write',
    bodyLimit: smallBody,
    async handle({ presets }, member, request, response) {
      const row = await addPresetVersion(presets, member, param(request, 'id'), request.body);
      response.status(201).json(row);
    },
  },
];
